import { randomUUID } from 'node:crypto';
import { createMailer } from './lib/server/adapters/mailer.ts';
import { config, ConfigError } from './lib/server/config/index.ts';
import { closeDatabase, database } from './lib/server/db/index.ts';
import { waitForMigrations } from './lib/server/db/migrate.ts';
import { log } from './lib/server/log/index.ts';
import { runWorker } from './lib/server/workflows/run-worker.ts';

// The background process: mails, jobs, deadlines. Stops in the middle of nothing on SIGTERM.
async function main(): Promise<void> {
  const stop = new AbortController();
  for (const signal of ['SIGTERM', 'SIGINT'] as const) process.on(signal, () => stop.abort());
  const db = database();
  await waitForMigrations(db, config().database.migrationsDir);
  const mailer = createMailer(config().mail);
  log().info('worker ready');
  await runWorker(db, {
    owner: `worker-${randomUUID()}`,
    send: (mail) => mailer.send(mail),
    signal: stop.signal,
  });
  closeDatabase();
}

try {
  await main();
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = error instanceof ConfigError ? 2 : 3;
}
