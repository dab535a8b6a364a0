import { createHash } from 'node:crypto';
import { and, desc, eq, inArray, sql } from 'drizzle-orm';
import { z } from 'zod';
import { realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Reader, Tx } from '../db/index.ts';
import { paymentOperation } from '../db/schema/money.ts';
import { defineJob, enqueueJob } from '../jobs/index.ts';

export type OperationRow = typeof paymentOperation.$inferSelect;
export type OperationKind = OperationRow['kind'];

/** States in which an operation still has to come to its end. */
export const unfinishedStates = ['planned', 'sent', 'unknown'] as const;

export const operationJob = defineJob({
  kind: 'payment-operation',
  schema: z.object({ operationId: z.string() }),
  maxAttempts: 5,
  leaseMs: 120_000,
  handler: async () => (await import('./execute.ts')).operationJobHandler,
});

export interface PlanInput {
  /** Names what is to happen once: `release:<milestone>`. */
  purpose: string;
  kind: OperationKind;
  orderId?: string | null;
  milestoneId?: string | null;
  companyId?: string | null;
  request: Record<string, unknown>;
  /** Wait before the first try, real ms. */
  delayMs?: number;
}

/** Keys depend on the purpose only, so that a database restored from a backup asks for the same again. */
export function idempotencyKey(purpose: string, generation: number): string {
  return `coilyard:${purpose}:${generation}`;
}

export function requestHash(request: Record<string, unknown>): string {
  return createHash('sha256').update(JSON.stringify(request)).digest('hex');
}

/**
 * Writes the operation row before the outside call is made, and the job that makes it. A purpose has at
 * most one unfinished operation; a new generation has a new key, and is planned only when the earlier
 * one was refused for certain or was looked up and not found.
 */
export async function planOperation(tx: Tx, input: PlanInput): Promise<OperationRow> {
  const [last] = await tx
    .select({ generation: paymentOperation.generation })
    .from(paymentOperation)
    .where(eq(paymentOperation.purpose, input.purpose))
    .orderBy(desc(paymentOperation.generation))
    .limit(1);
  const generation = (last?.generation ?? 0) + 1;
  const now = realNow();
  const [row] = await tx
    .insert(paymentOperation)
    .values({
      id: newId(),
      key: idempotencyKey(input.purpose, generation),
      purpose: input.purpose,
      generation,
      kind: input.kind,
      orderId: input.orderId ?? null,
      milestoneId: input.milestoneId ?? null,
      companyId: input.companyId ?? null,
      request: input.request,
      requestHash: requestHash(input.request),
      state: 'planned',
      plannedAt: now,
      nextTryAt: now + (input.delayMs ?? 0),
    })
    .returning();
  if (!row) throw new Error('the operation was not written');
  await enqueueJob(
    tx,
    operationJob,
    { operationId: row.id },
    { dedupeKey: row.id, runAt: now + (input.delayMs ?? 0) },
  );
  return row;
}

export async function operationById(reader: Reader, id: string): Promise<OperationRow | undefined> {
  const [row] = await reader.select().from(paymentOperation).where(eq(paymentOperation.id, id));
  return row;
}

/** The newest operation of a purpose. */
export async function latestOperation(reader: Reader, purpose: string): Promise<OperationRow | undefined> {
  const [row] = await reader
    .select()
    .from(paymentOperation)
    .where(eq(paymentOperation.purpose, purpose))
    .orderBy(desc(paymentOperation.generation))
    .limit(1);
  return row;
}

/** The operation an object at the service was made by, as its metadata says. */
export async function operationOf(
  reader: Reader,
  metadata: Record<string, string>,
): Promise<OperationRow | undefined> {
  const { purpose, generation } = metadata;
  if (!purpose || !generation) return undefined;
  const [row] = await reader
    .select()
    .from(paymentOperation)
    .where(and(eq(paymentOperation.purpose, purpose), eq(paymentOperation.generation, Number(generation))));
  return row;
}

/** Metadata that every object we make carries, so that it can be found again without our database. */
export function metadataOf(op: OperationRow): Record<string, string> {
  return {
    purpose: op.purpose,
    generation: String(op.generation),
    ...(op.orderId ? { order: op.orderId } : {}),
    ...(op.milestoneId ? { milestone: op.milestoneId } : {}),
  };
}

export async function updateOperation(
  tx: Tx,
  op: Pick<OperationRow, 'id'>,
  set: Partial<typeof paymentOperation.$inferInsert>,
): Promise<void> {
  await tx
    .update(paymentOperation)
    .set({ ...set, version: sql`${paymentOperation.version} + 1` })
    .where(eq(paymentOperation.id, op.id));
}

/** Unfinished operations of a milestone: while there is one, its money is in flight. */
export async function unfinishedOf(reader: Reader, milestoneId: string): Promise<OperationRow[]> {
  return reader
    .select()
    .from(paymentOperation)
    .where(
      and(
        eq(paymentOperation.milestoneId, milestoneId),
        inArray(paymentOperation.state, [...unfinishedStates]),
      ),
    );
}
