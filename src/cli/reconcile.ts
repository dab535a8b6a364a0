import { config } from '../lib/server/config/index.ts';
import { closeDatabase, database } from '../lib/server/db/index.ts';
import { waitForMigrations } from '../lib/server/db/migrate.ts';
import { reconcile } from '../lib/server/money/index.ts';

// Pairs the payment service's balance transactions with the books and prints every difference; exit 1 when there is one.
const db = database();
await waitForMigrations(db, config().database.migrationsDir);
const result = await reconcile(db);
for (const { kind, id, detail } of result.differences) process.stdout.write(`${kind}\t${id}\t${detail}\n`);
process.stdout.write(
  `${result.compared} balance transactions compared, ${result.differences.length} differences.\n`,
);
closeDatabase();
process.exitCode = result.balanced ? 0 : 1;
