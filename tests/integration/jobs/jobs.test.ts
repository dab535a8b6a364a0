import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { z } from 'zod';
import { transact } from '../../../src/lib/server/db/index.ts';
import { job } from '../../../src/lib/server/db/schema/platform.ts';
import {
  cancelJob,
  claimJob,
  defineJob,
  enqueueJob,
  jobState,
  runJob,
  type JobDefinition,
  type JobHandler,
} from '../../../src/lib/server/jobs/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { refusalCode } from '../../support/refusal.ts';

let t: TestDatabase;
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

const payload = z.object({ n: z.number() });
type Payload = z.output<typeof payload>;

function aJob(handler: JobHandler<Payload>, extra: { maxAttempts?: number; leaseMs?: number } = {}) {
  const definition = defineJob({
    kind: 'count',
    schema: payload,
    maxAttempts: extra.maxAttempts ?? 3,
    leaseMs: extra.leaseMs ?? 60_000,
    handler: () => Promise.resolve(handler),
  });
  return { definition, all: [definition] as unknown as readonly JobDefinition<never>[] };
}

const rows = () => t.db.select().from(job).orderBy(job.id);
const never = new AbortController().signal;

async function runAll(all: readonly JobDefinition<never>[], owner = 'w') {
  for (;;) {
    const row = await claimJob(t.db, owner, all);
    if (!row) return;
    await runJob(t.db, owner, all, row, never);
  }
}

test('a job runs once with its parsed payload and is done', async () => {
  const seen: number[] = [];
  const { definition, all } = aJob(({ n }) => {
    seen.push(n);
    return Promise.resolve();
  });
  const id = await enqueueJob(t.db, definition, { n: 7 });
  await runAll(all);
  expect(seen).toEqual([7]);
  expect(await jobState(t.db, id)).toMatchObject({ state: 'done', progress: 1 });
  expect(await refusalCode(jobState(t.db, 'none'))).toBe('not-found');
});

test('a job is queued with its event or not at all, and once per key', async () => {
  const { definition } = aJob(() => Promise.resolve());
  const failing = transact(t.db, async (tx) => {
    await enqueueJob(tx, definition, { n: 1 });
    throw new Error('on purpose');
  });
  await expect(failing).rejects.toThrow('on purpose');
  const first = await enqueueJob(t.db, definition, { n: 1 }, { dedupeKey: 'k' });
  expect(await enqueueJob(t.db, definition, { n: 2 }, { dedupeKey: 'k' })).toBe(first);
  expect(await rows()).toHaveLength(1);
});

test('two workers on two connections never take the same row', async () => {
  const { definition, all } = aJob(() => Promise.resolve());
  for (let i = 0; i < 20; i += 1) await enqueueJob(t.db, definition, { n: i });
  const other = t.openAnother();
  const claimed = await Promise.all(
    Array.from({ length: 30 }, (_, i) => claimJob(i % 2 ? t.db : other, `w${i}`, all)),
  );
  const ids = claimed.filter((row) => row !== undefined).map((row) => row.id);
  expect(ids).toHaveLength(20);
  expect(new Set(ids).size).toBe(20);
});

test('a lease that ran out is taken over, and the late worker can no longer write the end', async () => {
  const { definition, all } = aJob(() => Promise.resolve());
  const id = await enqueueJob(t.db, definition, { n: 1 });
  const first = await claimJob(t.db, 'slow', all);
  expect(await claimJob(t.db, 'next', all)).toBeUndefined();
  await t.db.update(job).set({ leaseUntil: Date.now() - 1 });
  const second = await claimJob(t.db, 'next', all);
  expect(second).toMatchObject({ id, attempts: 2, leaseOwner: 'next' });
  if (!first) throw new Error('not claimed');
  await runJob(t.db, 'slow', all, first, never);
  expect((await rows())[0]).toMatchObject({ state: 'running', leaseOwner: 'next' });
});

test('a failing job waits longer each time and is put aside after its last try', async () => {
  const { definition, all } = aJob(() => Promise.reject(new TypeError('no good')));
  await enqueueJob(t.db, definition, { n: 1 });
  const waits: number[] = [];
  for (let i = 0; i < 3; i += 1) {
    await t.db.update(job).set({ runAt: 0 });
    await runAll(all);
    waits.push(((await rows())[0]?.runAt ?? 0) - Date.now());
  }
  expect(waits[0]).toBeGreaterThan(1000);
  expect(waits[1]).toBeGreaterThan(waits[0] ?? 0);
  expect((await rows())[0]).toMatchObject({ state: 'dead', attempts: 3, lastError: 'TypeError: no good' });
  await t.db.update(job).set({ runAt: 0 });
  expect(await claimJob(t.db, 'w', all)).toBeUndefined();
});

test('a payload that no longer fits is a failure of the job, not of the worker', async () => {
  const { definition, all } = aJob(() => Promise.resolve(), { maxAttempts: 1 });
  const id = await enqueueJob(t.db, definition, { n: 1 });
  await t.db
    .update(job)
    .set({ payload: { n: 'seven' } })
    .where(eq(job.id, id));
  await runAll(all);
  expect((await rows())[0]).toMatchObject({ state: 'dead' });
});

test('a worker told to stop in the middle gives the job back without counting the try', async () => {
  const stop = new AbortController();
  const { definition, all } = aJob(async (_payload, { signal }) => {
    stop.abort();
    await new Promise((_resolve, reject) => {
      const end = () => reject(new Error('stopped'));
      if (signal.aborted) end();
      else signal.addEventListener('abort', end);
    });
  });
  await enqueueJob(t.db, definition, { n: 1 });
  const row = await claimJob(t.db, 'w', all);
  if (!row) throw new Error('not claimed');
  await runJob(t.db, 'w', all, row, stop.signal);
  expect((await rows())[0]).toMatchObject({ state: 'queued', attempts: 0, leaseOwner: null });
});

test('a long job keeps its lease while it works', async () => {
  const { definition, all } = aJob(() => new Promise((resolve) => setTimeout(resolve, 700)), {
    leaseMs: 300,
  });
  await enqueueJob(t.db, definition, { n: 1 });
  const row = await claimJob(t.db, 'w', all);
  if (!row) throw new Error('not claimed');
  const running = runJob(t.db, 'w', all, row, never);
  await new Promise((resolve) => setTimeout(resolve, 500));
  expect(await claimJob(t.db, 'thief', all)).toBeUndefined();
  await running;
  expect((await rows())[0]?.state).toBe('done');
});

test('a cancelled job sees its signal at the next report and stays cancelled', async () => {
  const { definition, all } = aJob(async (_payload, { signal, report, jobId }) => {
    await cancelJob(t.db, jobId);
    await report(0.5);
    if (!signal.aborted) throw new Error('the signal was not aborted');
  });
  await enqueueJob(t.db, definition, { n: 1 });
  await runAll(all);
  expect((await rows())[0]).toMatchObject({ state: 'cancelled', lastError: null });
});
