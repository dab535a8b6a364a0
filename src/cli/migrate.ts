import { config } from '../lib/server/config/index.ts';
import { closeDatabase, database } from '../lib/server/db/index.ts';
import { migrate } from '../lib/server/db/migrate.ts';

const applied = await migrate(database(), config().database.migrationsDir);
process.stdout.write(
  applied.length === 0 ? 'The database is up to date.\n' : `Applied ${applied.join(', ')}.\n`,
);
closeDatabase();
