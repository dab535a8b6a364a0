import { and, asc, inArray, lte, sql } from 'drizzle-orm';
import { LedgerBreach } from '../../domain/ledger-rules.ts';
import { PaymentServiceError, type Payments } from '../adapters/payments.ts';
import { realNow } from '../adapters/clock.ts';
import { transact, type Database } from '../db/index.ts';
import { paymentOperation } from '../db/schema/money.ts';
import { backoffMs } from '../jobs/backoff.ts';
import type { JobContext } from '../jobs/index.ts';
import { log } from '../log/index.ts';
import { raiseAlarm } from './alarms.ts';
import { AnswerDiffers, type OperationHandler } from './handler.ts';
import { checkoutHandler, expireSessionHandler } from './checkout-operations.ts';
import {
  operationById,
  planOperation,
  unfinishedStates,
  updateOperation,
  type OperationRow,
} from './operations.ts';
import { payoutAccountHandler } from './payout-operations.ts';
import { refundHandler } from './refund-operations.ts';
import { paymentService } from './service.ts';
import { transferHandler } from './transfer-operations.ts';

/** Longer than any call may take, so that nobody else tries while one is under way. */
const leaseMs = 100_000;

function handlerOf(op: OperationRow): OperationHandler<unknown> {
  const handlers: Record<OperationRow['kind'], unknown> = {
    checkout: checkoutHandler,
    transfer: transferHandler,
    refund: refundHandler,
    'expire-session': expireSessionHandler,
    'payout-account': payoutAccountHandler,
  };
  return handlers[op.kind] as OperationHandler<unknown>;
}

function isUnfinished(op: OperationRow): boolean {
  return (unfinishedStates as readonly string[]).includes(op.state);
}

export type OperationOutcome = 'known' | 'failed' | 'waiting';

/** Marks the operation as sent before the request leaves; undefined when it is finished or taken. */
async function claim(
  db: Database,
  id: string,
  now: number,
): Promise<{ op: OperationRow; before: OperationRow } | undefined> {
  return transact(db, async (tx) => {
    const before = await operationById(tx, id);
    if (!before || !isUnfinished(before)) return undefined;
    if (before.nextTryAt > now) return undefined;
    await updateOperation(tx, before, {
      state: 'sent',
      attempts: before.attempts + 1,
      sentAt: realNow(),
      nextTryAt: realNow() + leaseMs,
    });
    const op = await operationById(tx, id);
    return op ? { op, before } : undefined;
  });
}

/**
 * Makes the outside call of an operation and books its result; safe to run again at any time and by
 * several at once. An operation that may have had its effect already is first looked up at the service
 * by its metadata, then asked for again under the same key.
 */
export async function executeOperation(
  db: Database,
  operationId: string,
  options: { payments?: Payments; now?: number } = {},
): Promise<OperationOutcome> {
  const payments = options.payments ?? paymentService();
  const claimed = await claim(db, operationId, options.now ?? realNow());
  if (!claimed) {
    const row = await operationById(db, operationId);
    return row?.state === 'known' ? 'known' : row?.state === 'failed' ? 'failed' : 'waiting';
  }
  const { op, before } = claimed;
  const handler = handlerOf(op);
  let answer: unknown;
  try {
    const mayHaveHappened = before.state !== 'planned';
    answer =
      (mayHaveHappened ? await handler.find(payments, op) : undefined) ?? (await handler.call(payments, op));
  } catch (error) {
    if (!(error instanceof PaymentServiceError)) throw error;
    return afterError(db, payments, op, before, handler, error);
  }
  return bookAnswer(db, op, handler, answer);
}

/** Books an answer of the service, or sets it apart when it is not what was asked. */
export async function bookAnswer(
  db: Database,
  op: OperationRow,
  handler: OperationHandler<unknown>,
  answer: unknown,
): Promise<OperationOutcome> {
  try {
    await applyAnswer(db, op.id, handler, answer);
    return 'known';
  } catch (error) {
    if (error instanceof AnswerDiffers) {
      await transact(db, async (tx) => {
        const now = await operationById(tx, op.id);
        if (!now || !isUnfinished(now)) return;
        await updateOperation(tx, op, {
          state: 'failed',
          errorCode: 'answer-differs',
          lastError: error.message,
        });
        await raiseAlarm(tx, {
          key: `answer-differs:${op.id}`,
          kind: 'answer-differs',
          orderId: op.orderId,
          milestoneId: op.milestoneId,
          detail: error.message,
        });
      });
      return 'failed';
    }
    if (error instanceof LedgerBreach) {
      await raiseAlarm(db, {
        key: `ledger-breach:${op.id}`,
        kind: 'ledger-breach',
        orderId: op.orderId,
        milestoneId: op.milestoneId,
        detail: error.message,
      });
    }
    throw error;
  }
}

/** The operation becomes known together with all that follows; a second caller finds it known. */
export async function applyAnswer(
  db: Database,
  operationId: string,
  handler: OperationHandler<unknown>,
  answer: unknown,
): Promise<void> {
  await transact(db, async (tx) => {
    const op = await operationById(tx, operationId);
    if (!op || op.state === 'known') return;
    const { objectId, result } = await handler.apply(tx, op, answer);
    await updateOperation(tx, op, {
      state: 'known',
      objectId,
      result,
      knownAt: realNow(),
      errorCode: null,
      lastError: null,
    });
  });
}

async function afterError(
  db: Database,
  payments: Payments,
  op: OperationRow,
  before: OperationRow,
  handler: OperationHandler<unknown>,
  error: PaymentServiceError,
): Promise<OperationOutcome> {
  log().warn(
    { operation: op.id, kind: op.kind, attempt: op.attempts, error: error.kind, code: error.code },
    'payment call failed',
  );
  switch (error.kind) {
    case 'retryable':
    case 'unauthorized':
      // Nothing happened in this try; an earlier one may still be unclear.
      await wait(db, op, before.state === 'planned' ? 'planned' : 'unknown', error);
      return 'waiting';
    case 'unknown':
      if (error.replayed) return renew(db, payments, op, handler, error);
      await wait(db, op, 'unknown', error);
      return 'waiting';
    case 'key-reused':
    case 'already-refunded':
      return renew(db, payments, op, handler, error);
    default:
      await refuse(db, op, handler, error);
      return 'failed';
  }
}

async function wait(
  db: Database,
  op: OperationRow,
  state: 'planned' | 'unknown',
  error: PaymentServiceError,
): Promise<void> {
  await transact(db, async (tx) => {
    // Another run may have finished it meanwhile.
    const now = await operationById(tx, op.id);
    if (!now || !isUnfinished(now)) return;
    await updateOperation(tx, op, {
      state,
      errorCode: error.kind,
      lastError: error.message.slice(0, 500),
      nextTryAt: realNow() + backoffMs(op.attempts, Math.random()),
    });
    if (error.kind === 'unauthorized') {
      await raiseAlarm(tx, { key: 'payments-unauthorized', kind: 'unauthorized', detail: error.message });
    }
    if (op.attempts === 8) {
      await raiseAlarm(tx, {
        key: `stuck:${op.id}`,
        kind: 'operation-stuck',
        orderId: op.orderId,
        milestoneId: op.milestoneId,
        detail: `${op.kind} has been tried ${op.attempts} times: ${error.message}`,
      });
    }
  });
}

/**
 * The service repeats a stored failure for this key, or knows the key with other parameters: asking
 * again is useless. Look the object up; if it is there, book it, else go on under a new key.
 */
async function renew(
  db: Database,
  payments: Payments,
  op: OperationRow,
  handler: OperationHandler<unknown>,
  error: PaymentServiceError,
): Promise<OperationOutcome> {
  let found: unknown;
  try {
    found = await handler.find(payments, op);
  } catch (lookUp) {
    if (!(lookUp instanceof PaymentServiceError)) throw lookUp;
    await wait(db, op, 'unknown', lookUp);
    return 'waiting';
  }
  if (found !== undefined) return bookAnswer(db, op, handler, found);
  if (error.kind === 'already-refunded') {
    await refuse(db, op, handler, error);
    return 'failed';
  }
  await transact(db, async (tx) => {
    const now = await operationById(tx, op.id);
    if (!now || !isUnfinished(now)) return;
    await updateOperation(tx, op, {
      state: 'failed',
      errorCode: error.kind,
      lastError: `replaced by a new key: ${error.message}`.slice(0, 500),
    });
    await planOperation(tx, { ...op, delayMs: 1000 });
    if (error.kind === 'key-reused') {
      await raiseAlarm(tx, {
        key: `key-reused:${op.id}`,
        kind: 'key-reused',
        orderId: op.orderId,
        milestoneId: op.milestoneId,
        detail: `The key ${op.key} was used with other parameters before; a new key was taken.`,
      });
    }
  });
  return 'failed';
}

async function refuse(
  db: Database,
  op: OperationRow,
  handler: OperationHandler<unknown>,
  error: PaymentServiceError,
): Promise<void> {
  await transact(db, async (tx) => {
    const now = await operationById(tx, op.id);
    if (!now || !isUnfinished(now)) return;
    await updateOperation(tx, op, {
      state: 'failed',
      errorCode: error.code ?? error.kind,
      lastError: error.message.slice(0, 500),
    });
    await handler.refused(tx, now, error);
  });
}

export async function operationJobHandler(
  payload: { operationId: string },
  context: JobContext,
): Promise<void> {
  // Later tries belong to the recovery run, which knows when the next one is due.
  await executeOperation(context.db, payload.operationId);
}

/** Finishes or looks up every unfinished operation that is due; run at start and again and again. */
export async function recoverOperations(
  db: Database,
  options: { payments?: Payments; now?: number; limit?: number; signal?: AbortSignal } = {},
): Promise<{ finished: number; waiting: number }> {
  const now = options.now ?? realNow();
  const due = await db
    .select({ id: paymentOperation.id })
    .from(paymentOperation)
    .where(and(inArray(paymentOperation.state, [...unfinishedStates]), lte(paymentOperation.nextTryAt, now)))
    .orderBy(asc(paymentOperation.nextTryAt))
    .limit(options.limit ?? 100);
  let finished = 0;
  for (const { id } of due) {
    if (options.signal?.aborted) break;
    const outcome = await executeOperation(db, id, { ...options, now });
    if (outcome !== 'waiting') finished += 1;
  }
  return { finished, waiting: due.length - finished };
}

/** How many operations are not finished, for pages and probes. */
export async function unfinishedCount(db: Database): Promise<number> {
  const [row] = await db
    .select({ n: sql<number>`count(*)` })
    .from(paymentOperation)
    .where(inArray(paymentOperation.state, [...unfinishedStates]));
  return row?.n ?? 0;
}
