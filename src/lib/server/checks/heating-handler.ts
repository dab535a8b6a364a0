import { eq } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import { heatingRequestSchema } from '../../schemas/api/heating.ts';
import { heatingRun } from '../db/schema/checks.ts';
import type { JobHandler } from '../jobs/index.ts';
import { solveInThread } from './solve-pool.ts';

/** A run over this is stopped and says so. */
const longestMs = 600_000;

/** Heats on a solver thread, passing progress on and a cancelled job in; refusals are kept in words. */
export const runHeatingJob: JobHandler<{ heatingId: string }> = async (
  { heatingId },
  { db, signal, report },
) => {
  const [row] = await db.select().from(heatingRun).where(eq(heatingRun.id, heatingId));
  if (!row) return;
  const { requirement, drive, frequency, duration, setting } = heatingRequestSchema.parse(
    JSON.parse(row.request),
  );
  const progress = new SharedArrayBuffer(8);
  const stop = new SharedArrayBuffer(4);
  const share = new Float64Array(progress);
  const flag = new Int32Array(stop);
  const ask = () => Atomics.store(flag, 0, 1);
  signal.addEventListener('abort', ask);
  const ticking = setInterval(() => void report(share[0] ?? 0).catch(ask), 500);
  try {
    const result = await solveInThread(
      {
        kind: 'heating',
        requirement,
        wish: { drive, frequency, duration, setting: setting ?? 'default' },
        watch: { progress, stop },
      },
      { signal, timeLimitMs: longestMs },
    );
    await db.update(heatingRun).set({ result }).where(eq(heatingRun.id, heatingId));
  } catch (error) {
    if (signal.aborted || !(error instanceof AppError) || error.code === 'busy') throw error;
    await db.update(heatingRun).set({ problem: error.message }).where(eq(heatingRun.id, heatingId));
  } finally {
    clearInterval(ticking);
    signal.removeEventListener('abort', ask);
  }
};
