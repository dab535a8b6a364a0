import { and, count, desc, eq, lt } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { jobMachine, type HandEvent, type JobState } from '../../domain/delivery.ts';
import { AppError } from '../../domain/errors.ts';
import { nextState } from '../../domain/transitions.ts';
import { requireAccess } from '../access/index.ts';
import { realNow } from '../adapters/clock.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { job } from '../db/schema/platform.ts';

const pageSize = 50;

/** Jobs by state, newest first. Payloads hold ids, never secrets, but lists do without them. */
export async function listJobs(
  db: Database,
  actor: Actor,
  filter: { state: JobState | null; after: string | null },
) {
  requireAccess(actor, 'admin.operate');
  const rows = await db
    .select({
      id: job.id,
      kind: job.kind,
      state: job.state,
      attempts: job.attempts,
      runAt: job.runAt,
      lastError: job.lastError,
      progress: job.progress,
      createdAt: job.createdAt,
      finishedAt: job.finishedAt,
    })
    .from(job)
    .where(
      and(
        ...(filter.state ? [eq(job.state, filter.state)] : []),
        ...(filter.after ? [lt(job.id, filter.after)] : []),
      ),
    )
    .orderBy(desc(job.id))
    .limit(pageSize + 1);
  const items = rows.slice(0, pageSize).map((row) => ({ ...row, progress: row.progress / 1_000_000 }));
  return { items, next: rows.length > pageSize ? (items.at(-1)?.id ?? null) : null };
}

/** How many jobs are in each state. */
export async function jobCounts(db: Database, actor: Actor): Promise<Record<JobState, number>> {
  requireAccess(actor, 'admin.view');
  const counts: Record<JobState, number> = {
    queued: 0,
    running: 0,
    done: 0,
    dead: 0,
    cancelled: 0,
    parked: 0,
  };
  const rows = await db.select({ state: job.state, n: count() }).from(job).groupBy(job.state);
  for (const row of rows) counts[row.state] = row.n;
  return counts;
}

/** Runs a dead or parked job again, or puts one aside; both are told in the audit trail. */
export async function handleJob(db: Database, actor: Actor, id: string, event: HandEvent): Promise<void> {
  requireAccess(actor, 'admin.operate');
  await transact(db, async (tx) => {
    const [row] = await tx.select({ state: job.state, kind: job.kind }).from(job).where(eq(job.id, id));
    if (!row) throw new AppError('not-found');
    const to = nextState(jobMachine, row.state, event);
    if (!to) throw new AppError('state-conflict', { detail: `The job is ${row.state} meanwhile.` });
    const result = await tx
      .update(job)
      .set({
        state: to,
        leaseOwner: null,
        leaseUntil: null,
        ...(event === 'retry' ? { attempts: 0, runAt: realNow(), finishedAt: null } : {}),
      })
      .where(and(eq(job.id, id), eq(job.state, row.state)));
    if (result.rowsAffected !== 1) throw new AppError('version-conflict');
    await audit(tx, actor, {
      action: `job.${event}`,
      subjectType: 'job',
      subjectId: id,
      detail: { kind: row.kind, from: row.state, to },
    });
  });
}
