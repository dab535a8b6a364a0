import { and, eq, inArray, lte, or, sql } from 'drizzle-orm';
import type { z } from 'zod';
import { AppError } from '../../domain/errors.ts';
import { realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Database, Reader, Tx } from '../db/index.ts';
import { job } from '../db/schema/platform.ts';
import { log } from '../log/index.ts';
import { backoffMs } from './backoff.ts';

export interface JobContext {
  db: Database;
  jobId: string;
  attempt: number;
  /** Aborted when the worker stops or the job is cancelled. */
  signal: AbortSignal;
  /** 0 to 1; written at most twice a second. */
  report(progress: number): Promise<void>;
}

export type JobHandler<Payload> = (payload: Payload, context: JobContext) => Promise<void>;

/** A light definition; the handler is loaded when the first job of its kind runs. */
export interface JobDefinition<Payload = unknown> {
  kind: string;
  schema: z.ZodType<Payload>;
  /** Tries before it is put aside as dead. */
  maxAttempts: number;
  leaseMs: number;
  /** Takes minutes: runs in a lane of its own, so that mails and money never wait behind it. */
  long?: boolean;
  handler: () => Promise<JobHandler<Payload>>;
}

export function defineJob<Payload>(definition: JobDefinition<Payload>): JobDefinition<Payload> {
  return definition;
}

/**
 * Puts a job in the queue in the caller's transaction. With a dedupe key, a job of that kind and key
 * that is there already is kept and its id returned.
 */
export async function enqueueJob<Payload>(
  tx: Tx | Database,
  definition: JobDefinition<Payload>,
  payload: Payload,
  options: { runAt?: number; dedupeKey?: string } = {},
): Promise<string> {
  const now = realNow();
  const id = newId();
  const [row] = await tx
    .insert(job)
    .values({
      id,
      kind: definition.kind,
      payload: definition.schema.parse(payload),
      runAt: options.runAt ?? now,
      createdAt: now,
      dedupeKey: options.dedupeKey ?? null,
    })
    .onConflictDoNothing()
    .returning({ id: job.id });
  if (row) return row.id;
  const [existing] = await tx
    .select({ id: job.id })
    .from(job)
    .where(and(eq(job.kind, definition.kind), eq(job.dedupeKey, options.dedupeKey ?? '')));
  if (!existing) throw new Error(`job ${definition.kind} was neither written nor found`);
  return existing.id;
}

export type JobRow = typeof job.$inferSelect;

/** Takes one due job under a lease; a lease that ran out is taken over. One statement, so two workers never take the same. */
export async function claimJob(
  db: Database,
  owner: string,
  definitions: readonly JobDefinition<never>[],
): Promise<JobRow | undefined> {
  if (definitions.length === 0) return undefined;
  const now = realNow();
  const longest = Math.max(...definitions.map((d) => d.leaseMs));
  const due = db
    .select({ id: job.id })
    .from(job)
    .where(
      and(
        inArray(
          job.kind,
          definitions.map((d) => d.kind),
        ),
        or(
          and(eq(job.state, 'queued'), lte(job.runAt, now)),
          and(eq(job.state, 'running'), lte(job.leaseUntil, now)),
        ),
      ),
    )
    .orderBy(job.runAt, job.id)
    .limit(1);
  const [row] = await db
    .update(job)
    .set({
      state: 'running',
      leaseOwner: owner,
      leaseUntil: now + longest,
      attempts: sql`${job.attempts} + 1`,
    })
    .where(inArray(job.id, due))
    .returning();
  return row;
}

async function finish(db: Database, row: JobRow, owner: string, set: Partial<JobRow>): Promise<void> {
  await db
    .update(job)
    .set({ leaseOwner: null, leaseUntil: null, ...set })
    .where(and(eq(job.id, row.id), eq(job.leaseOwner, owner)));
}

function messageOf(error: unknown): string {
  return (error instanceof Error ? `${error.name}: ${error.message}` : String(error)).slice(0, 1000);
}

/** Runs one claimed job to its end: done, queued again with backoff, or dead after its last try. */
export async function runJob(
  db: Database,
  owner: string,
  definitions: readonly JobDefinition<never>[],
  row: JobRow,
  signal: AbortSignal,
): Promise<void> {
  const definition = definitions.find((d) => d.kind === row.kind);
  if (!definition) return;
  const cancel = new AbortController();
  const either = AbortSignal.any([signal, cancel.signal]);
  let reportedAt = 0;
  const extend = async (progress?: number) => {
    const [still] = await db
      .update(job)
      .set({
        leaseUntil: realNow() + definition.leaseMs,
        ...(progress === undefined ? {} : { progress: Math.round(progress * 1_000_000) }),
      })
      .where(and(eq(job.id, row.id), eq(job.leaseOwner, owner), eq(job.state, 'running')))
      .returning({ id: job.id });
    if (!still) cancel.abort();
  };
  const heartbeat = setInterval(() => void extend().catch(() => cancel.abort()), definition.leaseMs / 3);
  try {
    const payload = definition.schema.parse(row.payload);
    const handler = await definition.handler();
    await handler(payload, {
      db,
      jobId: row.id,
      attempt: row.attempts,
      signal: either,
      report: async (progress) => {
        if (realNow() - reportedAt < 500) return;
        reportedAt = realNow();
        await extend(progress);
      },
    });
    await finish(db, row, owner, {
      state: 'done',
      finishedAt: realNow(),
      progress: 1_000_000,
      lastError: null,
    });
  } catch (error) {
    if (signal.aborted) {
      await finish(db, row, owner, { state: 'queued', runAt: realNow(), attempts: row.attempts - 1 });
      return;
    }
    const dead = row.attempts >= definition.maxAttempts;
    log().warn(
      { job: row.id, kind: row.kind, attempt: row.attempts, dead, error: messageOf(error) },
      'job failed',
    );
    await finish(db, row, owner, {
      state: dead ? 'dead' : 'queued',
      runAt: realNow() + backoffMs(row.attempts, Math.random()),
      lastError: messageOf(error),
      ...(dead ? { finishedAt: realNow() } : {}),
    });
  } finally {
    clearInterval(heartbeat);
  }
}

/** State and progress of one job, for pages that poll. */
export async function jobState(reader: Reader, id: string) {
  const [row] = await reader
    .select({
      id: job.id,
      kind: job.kind,
      state: job.state,
      progress: job.progress,
      lastError: job.lastError,
    })
    .from(job)
    .where(eq(job.id, id));
  if (!row) throw new AppError('not-found');
  return { ...row, progress: row.progress / 1_000_000 };
}

/** Stops a job that is queued or running; a running handler sees its signal aborted at the next report. */
export async function cancelJob(tx: Tx | Database, id: string): Promise<boolean> {
  const result = await tx
    .update(job)
    .set({ state: 'cancelled', finishedAt: realNow(), leaseOwner: null, leaseUntil: null })
    .where(and(eq(job.id, id), inArray(job.state, ['queued', 'running'])));
  return result.rowsAffected === 1;
}
