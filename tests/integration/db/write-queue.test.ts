import { spawn, type ChildProcessByStdio } from 'node:child_process';
import { once } from 'node:events';
import { monitorEventLoopDelay } from 'node:perf_hooks';
import { createInterface } from 'node:readline';
import type { Readable } from 'node:stream';
import { count, eq, like, sql } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { transact } from '../../../src/lib/server/db/index.ts';
import { isUniqueViolation } from '../../../src/lib/server/db/constraint.ts';
import { counter, membership } from '../../../src/lib/server/db/schema/companies.ts';
import { setting } from '../../../src/lib/server/db/schema/platform.ts';
import { nextNumber } from '../../../src/lib/server/db/counters.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';

let t: TestDatabase;
const children: ChildProcessByStdio<null, Readable, null>[] = [];

beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => {
  for (const child of children.splice(0)) child.kill('SIGKILL');
  t.close();
});

function child(...args: string[]) {
  const started = spawn(process.execPath, ['--import', 'tsx', 'tests/support/db-child.ts', ...args], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  children.push(started);
  return { process: started, lines: createInterface({ input: started.stdout }) };
}

const rows = async (pattern: string) =>
  (await t.db.select({ n: count() }).from(setting).where(like(setting.key, pattern)))[0]?.n;

test('sixty mixed operations at once all succeed, and none sees half of another', async () => {
  const work: Promise<unknown>[] = [];
  const sums: number[] = [];
  await t.db.insert(setting).values([
    { key: 'left', value: '1000' },
    { key: 'right', value: '0' },
  ]);
  const move = (amount: number) =>
    transact(t.db, async (tx) => {
      const [left] = await tx.select().from(setting).where(eq(setting.key, 'left'));
      await new Promise((resolve) => setTimeout(resolve, 1));
      await tx
        .update(setting)
        .set({ value: String(Number(left?.value) - amount) })
        .where(eq(setting.key, 'left'));
      await tx.run(
        sql`update setting set value = cast(cast(value as integer) + ${amount} as text) where key = 'right'`,
      );
    });
  for (let i = 0; i < 20; i += 1) {
    work.push(move(1));
    work.push(
      t.db
        .insert(setting)
        .values({ key: `single-${i}`, value: 'x' })
        .run(),
    );
    work.push(
      t.db
        .select({ sum: sql<number>`sum(cast(value as integer))` })
        .from(setting)
        .where(sql`key in ('left', 'right')`)
        .then(([row]) => sums.push(row?.sum ?? 0)),
    );
  }
  await Promise.all(work);
  expect(sums).toEqual(Array(20).fill(1000));
  expect(await rows('single-%')).toBe(20);
  const [right] = await t.db.select().from(setting).where(eq(setting.key, 'right'));
  expect(Number(right?.value)).toBe(20);
});

test('foreign keys are on, also on the connection that follows a transaction', async () => {
  const orphan = { id: 'm', companyId: 'none', userId: 'nobody', roles: [], createdAt: 0 };
  await expect(t.db.insert(membership).values(orphan).run()).rejects.toThrow();
  await transact(t.db, (tx) => tx.insert(setting).values({ key: 'a', value: '1' }).run());
  for (let i = 0; i < 3; i += 1) {
    await expect(t.db.insert(membership).values(orphan).run()).rejects.toThrow();
    await expect(transact(t.db, (tx) => tx.insert(membership).values(orphan).run())).rejects.toThrow();
  }
  expect(await t.db.select().from(membership)).toEqual([]);
});

test('a transaction that fails leaves nothing and does not block the next', async () => {
  const failing = transact(t.db, async (tx) => {
    await tx.insert(setting).values({ key: 'half', value: '1' });
    throw new Error('on purpose');
  });
  await expect(failing).rejects.toThrow('on purpose');
  await transact(t.db, (tx) => tx.insert(setting).values({ key: 'next', value: '1' }).run());
  expect(await t.db.select({ key: setting.key }).from(setting)).toEqual([{ key: 'next' }]);
});

test('a write around the transaction inside it is refused loudly instead of waiting for itself', async () => {
  const wrong = transact(t.db, async (tx) => {
    await tx.insert(setting).values({ key: 'in', value: '1' });
    await t.db.insert(setting).values({ key: 'around', value: '1' });
  });
  await expect(wrong).rejects.toMatchObject({ cause: { message: /outside the transaction/ } });
  expect(await t.db.select().from(setting)).toEqual([]);
});

test('a unique violation is told apart from other failures', async () => {
  await t.db.insert(setting).values({ key: 'a', value: '1' });
  const twice: unknown = await t.db
    .insert(setting)
    .values({ key: 'a', value: '2' })
    .run()
    .catch((e: unknown) => e);
  expect(isUniqueViolation(twice)).toBe(true);
  expect(isUniqueViolation(new Error('unique'))).toBe(false);
});

test('numbers that people see are counted without gaps or repeats under concurrency', async () => {
  const numbers = await Promise.all(
    Array.from({ length: 25 }, () => transact(t.db, (tx) => nextNumber(tx, 'c1', 'request'))),
  );
  expect([...numbers].sort((a, b) => a - b)).toEqual(Array.from({ length: 25 }, (_, i) => 1001 + i));
  expect(await transact(t.db, (tx) => nextNumber(tx, 'c2', 'request'))).toBe(1001);
  expect(await t.db.select().from(counter)).toHaveLength(2);
});

test('while another process holds the lock writes wait awake and then succeed', async () => {
  const other = child('hold', t.file, '1500');
  const lines = other.lines[Symbol.asyncIterator]();
  expect((await lines.next()).value).toBe('holding');
  const delay = monitorEventLoopDelay({ resolution: 5 });
  delay.enable();
  const start = performance.now();
  await Promise.all([
    transact(t.db, (tx) => tx.insert(setting).values({ key: 'mine-1', value: '1' }).run()),
    transact(t.db, (tx) => tx.insert(setting).values({ key: 'mine-2', value: '1' }).run()),
    t.db.insert(setting).values({ key: 'mine-3', value: '1' }).run(),
  ]);
  delay.disable();
  expect(performance.now() - start).toBeGreaterThan(500);
  // The driver waits 20 ms at a time; in between the loop is free. Generous for a loaded machine.
  expect(delay.percentile(99) / 1e6).toBeLessThan(250);
  expect((await lines.next()).value).toBe('released');
  expect(await rows('mine-%')).toBe(3);
  expect(await rows('held')).toBe(1);
});

test('a killed process loses no acknowledged commit and leaves no half of one', async () => {
  const writer = child('write', t.file);
  const acknowledged: string[] = [];
  for await (const line of writer.lines) {
    acknowledged.push(line);
    if (acknowledged.length === 40) writer.process.kill('SIGKILL');
  }
  if (writer.process.exitCode === null && writer.process.signalCode === null)
    await once(writer.process, 'exit');
  expect(acknowledged.length).toBeGreaterThanOrEqual(40);
  const db = t.openAnother();
  const keys = new Set((await db.select({ key: setting.key }).from(setting)).map((row) => row.key));
  for (const key of acknowledged) {
    expect(keys.has(key), key).toBe(true);
    expect(keys.has(key.replace('row', 'pair')), key).toBe(true);
  }
  expect([...keys].filter((key) => key.startsWith('row')).length).toBe(
    [...keys].filter((key) => key.startsWith('pair')).length,
  );
  const check = await db.$client.execute('PRAGMA integrity_check');
  expect(check.rows[0]?.['integrity_check']).toBe('ok');
});
