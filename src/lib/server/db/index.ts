import { mkdirSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { createClient, type Client } from '@libsql/client';
import { drizzle, type LibSQLDatabase } from 'drizzle-orm/libsql';
import { config } from '../config/index.ts';
import { insideTransaction, isBusy, queueWrites, sleepWithJitter } from './write-queue.ts';

// No schema is given to Drizzle: queries name their tables, so this module does not depend on any domain.
export type Database = LibSQLDatabase<Record<string, never>> & { $client: Client };
/** The handle inside a transaction. */
export type Tx = Parameters<Parameters<Database['transaction']>[0]>[0];
/** What a read may run on. */
export type Reader = Database | Tx;

/** Opens a database: file or libSQL server. The lock wait is 20 ms; longer waits are ours, awake. */
export function openDatabase(url: string, authToken?: string): Database {
  if (url.startsWith('file:')) {
    const file = url.startsWith('file://') ? fileURLToPath(url) : url.slice('file:'.length);
    mkdirSync(path.dirname(path.resolve(file)), { recursive: true });
  }
  const client = createClient({ url, timeout: 20, ...(authToken ? { authToken } : {}) });
  return drizzle(queueWrites(client)) as Database;
}

/**
 * One write transaction: all of it or nothing. Run again when another process held the lock, so
 * `work` must have no effect outside the database (no network, no mail: use the outbox and jobs).
 */
export async function transact<T>(db: Database, work: (tx: Tx) => Promise<T>): Promise<T> {
  for (let attempt = 1; ; attempt += 1) {
    try {
      return await db.transaction((tx) => insideTransaction(() => work(tx)));
    } catch (error) {
      if (!isBusy(error) || attempt >= 20) throw error;
      await sleepWithJitter();
    }
  }
}

let shared: Database | undefined;

/** The database of this process, opened at first use. */
export function database(): Database {
  shared ??= openDatabase(config().database.url, config().database.authToken);
  return shared;
}

export function closeDatabase(): void {
  shared?.$client.close();
  shared = undefined;
}
