import { eq, lte } from 'drizzle-orm';
import type { z } from 'zod';
import { dayMs } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { methodVersion } from '../../induction/version.ts';
import type { heatingStateSchema, HeatingRequest } from '../../schemas/api/heating.ts';
import type { HeatingResult } from '../../induction/heating/types.ts';
import { realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { config } from '../config/index.ts';
import { transact, type Database, type Reader } from '../db/index.ts';
import { heatingRun } from '../db/schema/checks.ts';
import { countAgainstLimit } from '../http/rate-limit.ts';
import { cancelJob, enqueueJob, jobState } from '../jobs/index.ts';
import { heatingJob } from './heating-job.ts';

export type HeatingAsker = { userId: string } | { address: string };
type HeatingState = z.input<typeof heatingStateSchema>;

/** Results are kept so long, with an account or without. */
const keptMs = dayMs;

/** Puts a heating run in the queue; a run is dear, so a tenth of the checks per minute is allowed. */
export async function askHeating(
  db: Database,
  who: HeatingAsker,
  request: HeatingRequest,
): Promise<{ id: string }> {
  const key = 'userId' in who ? `heatings/user/${who.userId}` : `heatings/address/${who.address}`;
  const count = Math.max(2, Math.floor(config().limits.publicChecksPerMinute / 10));
  await countAgainstLimit(db, key, { count, windowMs: 60_000 });
  return transact(db, async (tx) => {
    const id = newId();
    const jobId = await enqueueJob(tx, heatingJob, { heatingId: id }, { dedupeKey: id });
    await tx.insert(heatingRun).values({
      id,
      jobId,
      userId: 'userId' in who ? who.userId : null,
      request: JSON.stringify(request),
      methodVersion,
      createdAt: realNow(),
      expiresAt: realNow() + keptMs,
    });
    return { id };
  });
}

/** The run, if it is this asker's: one made with an account belongs to it, one without to whoever has the id. */
async function ownRun(reader: Reader, userId: string | null, id: string) {
  const [row] = await reader.select().from(heatingRun).where(eq(heatingRun.id, id));
  if (!row || row.expiresAt <= realNow() || (row.userId !== null && row.userId !== userId)) {
    throw new AppError('not-found');
  }
  return row;
}

/** State, progress and, once it is there, the result of a run. */
export async function heatingState(reader: Reader, userId: string | null, id: string): Promise<HeatingState> {
  const row = await ownRun(reader, userId, id);
  const job = await jobState(reader, row.jobId);
  const state: HeatingState['state'] =
    row.problem !== null || job.state === 'dead' || job.state === 'parked'
      ? 'failed'
      : job.state === 'done' || row.result !== null
        ? 'done'
        : job.state === 'cancelled' || job.state === 'running'
          ? job.state
          : 'queued';
  return {
    id,
    state,
    progress: state === 'done' ? 1 : Math.min(Math.max(job.progress, 0), 1),
    message: row.problem ?? (state === 'failed' ? 'The run did not come to an end.' : null),
    methodVersion: row.methodVersion,
    result: row.result === null ? null : (JSON.parse(row.result) as HeatingResult),
  };
}

/** Stops a run that is waiting or running; a finished one stays as it is. */
export async function cancelHeating(db: Database, userId: string | null, id: string): Promise<void> {
  const row = await ownRun(db, userId, id);
  await cancelJob(db, row.jobId);
}

/** Takes away what is older than a day. */
export async function clearOldHeatings(db: Database): Promise<void> {
  await db.delete(heatingRun).where(lte(heatingRun.expiresAt, realNow()));
}
