import { mkdtempSync, rmSync, copyFileSync, existsSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { openDatabase, type Database } from '../../src/lib/server/db/index.ts';
import { migrate } from '../../src/lib/server/db/migrate.ts';

let template: Promise<string> | undefined;

/** A migrated file made once per test worker; each test gets a copy of it. */
async function migratedTemplate(): Promise<string> {
  const dir = mkdtempSync(path.join(tmpdir(), 'coilyard-template-'));
  const file = path.join(dir, 'template.db');
  const db = openDatabase(`file:${file}`);
  await migrate(db, path.resolve('drizzle'));
  await db.$client.execute('PRAGMA wal_checkpoint(TRUNCATE)');
  db.$client.close();
  process.on('exit', () => rmSync(dir, { recursive: true, force: true }));
  return file;
}

export interface TestDatabase {
  db: Database;
  file: string;
  /** Opens a second client on the same file, as another process would. */
  openAnother(): Database;
  close(): void;
}

/** A fresh migrated database in a file of its own; never `:memory:`, which loses tables after a transaction. */
export async function testDatabase(): Promise<TestDatabase> {
  template ??= migratedTemplate();
  const source = await template;
  const dir = mkdtempSync(path.join(tmpdir(), 'coilyard-test-'));
  const file = path.join(dir, 'test.db');
  copyFileSync(source, file);
  if (existsSync(`${source}-wal`)) copyFileSync(`${source}-wal`, `${file}-wal`);
  const opened: Database[] = [];
  const open = () => {
    const db = openDatabase(`file:${file}`);
    opened.push(db);
    return db;
  };
  return {
    db: open(),
    file,
    openAnother: open,
    close() {
      for (const db of opened) db.$client.close();
      rmSync(dir, { recursive: true, force: true });
    },
  };
}
