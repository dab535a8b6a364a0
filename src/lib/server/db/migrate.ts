import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import path from 'node:path';
import type { Client } from '@libsql/client';
import type { Database } from './index.ts';

interface Migration {
  tag: string;
  hash: string;
  statements: string[];
}

/** Reads the committed migrations in order. */
export function readMigrations(dir: string): Migration[] {
  const journal = JSON.parse(readFileSync(path.join(dir, 'meta/_journal.json'), 'utf8')) as {
    entries: { tag: string }[];
  };
  return journal.entries.map(({ tag }) => {
    const sql = readFileSync(path.join(dir, `${tag}.sql`), 'utf8');
    return {
      tag,
      hash: createHash('sha256').update(sql).digest('hex'),
      statements: sql
        .split('--> statement-breakpoint')
        .map((statement) => statement.trim())
        .filter((statement) => statement !== ''),
    };
  });
}

async function appliedHashes(client: Client): Promise<string[]> {
  const table = await client.execute(
    `select name from sqlite_master where type = 'table' and name = 'migration'`,
  );
  if (table.rows.length === 0) return [];
  const rows = await client.execute('select hash from migration order by id');
  return rows.rows.map((row) => String(row['hash']));
}

/**
 * Applies what is missing in one write transaction. Refuses a database whose applied migrations are
 * not the beginning of the committed ones: that is another history, not an older version.
 */
export async function migrate(db: Database, dir: string): Promise<string[]> {
  const client = db.$client;
  const migrations = readMigrations(dir);
  if (client.protocol === 'file') await client.execute('PRAGMA journal_mode = WAL');
  const transaction = await client.transaction('write');
  try {
    await transaction.execute(
      `create table if not exists migration (id integer primary key, tag text not null, hash text not null, applied_at integer not null)`,
    );
    const applied = (await transaction.execute('select hash from migration order by id')).rows.map((row) =>
      String(row['hash']),
    );
    applied.forEach((hash, index) => {
      if (migrations[index]?.hash !== hash) {
        throw new Error(
          `The database was migrated by another version (step ${index + 1}). Start with a fresh one or restore the matching release.`,
        );
      }
    });
    const missing = migrations.slice(applied.length);
    for (const migration of missing) {
      for (const statement of migration.statements) await transaction.execute(statement);
      await transaction.execute({
        sql: 'insert into migration (tag, hash, applied_at) values (?, ?, ?)',
        args: [migration.tag, migration.hash, Date.now()],
      });
    }
    await transaction.commit();
    return missing.map((migration) => migration.tag);
  } catch (error) {
    transaction.close();
    throw error;
  }
}

/** True once every committed migration is applied. */
export async function isMigrated(db: Database, dir: string): Promise<boolean> {
  const expected = readMigrations(dir).map((migration) => migration.hash);
  const applied = await appliedHashes(db.$client);
  return expected.length === applied.length && expected.every((hash, index) => hash === applied[index]);
}

/** App and worker never migrate: they wait for `migrate` to have run, and say so when it has not. */
export async function waitForMigrations(db: Database, dir: string, limitMs = 30_000): Promise<void> {
  const giveUpAt = Date.now() + limitMs;
  while (!(await isMigrated(db, dir))) {
    if (Date.now() > giveUpAt) {
      throw new Error('The database is not migrated to this version: run the migrate command first.');
    }
    await new Promise((resolve) => setTimeout(resolve, 250));
  }
}
