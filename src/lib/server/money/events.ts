import { and, asc, eq, lte } from 'drizzle-orm';
import { z } from 'zod';
import { dayMs } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import {
  PaymentServiceError,
  type AccountEvent,
  type PaymentEvent,
  type Payments,
} from '../adapters/payments.ts';
import { businessNow, realNow } from '../adapters/clock.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { paymentEvent, paymentOperation } from '../db/schema/money.ts';
import { setting } from '../db/schema/platform.ts';
import { defineJob, enqueueJob, type JobContext } from '../jobs/index.ts';
import { syncChargeBack } from './charge-backs.ts';
import { syncPayoutAccount } from './payout-accounts.ts';
import { paymentService } from './service.ts';
import { failSession, noteDeclined, syncSession } from './sessions.ts';
import { syncRefund, syncTransfer } from './sync-payout.ts';

export type PaymentEventRow = typeof paymentEvent.$inferSelect;

export const paymentEventJob = defineJob({
  kind: 'payment-event',
  schema: z.object({ eventId: z.string() }),
  maxAttempts: 40,
  leaseMs: 60_000,
  handler: async () => (await import('./events.ts')).paymentEventHandler,
});

const metadata = z.record(z.string(), z.string()).catch({});

async function store(
  tx: Tx,
  event: { id: string; type: string; objectId: string; createdAt: number; reference: Record<string, string> },
  endpoint: 'payments' | 'accounts',
  source: 'webhook' | 'backfill',
): Promise<boolean> {
  const [made] = await tx
    .insert(paymentEvent)
    .values({
      id: event.id,
      endpoint,
      type: event.type,
      objectId: event.objectId,
      reference: event.reference,
      created: event.createdAt,
      receivedAt: await businessNow(tx),
      source,
      state: 'received',
    })
    .onConflictDoNothing()
    .returning({ id: paymentEvent.id });
  if (!made) return false;
  await enqueueJob(tx, paymentEventJob, { eventId: event.id }, { dedupeKey: event.id });
  return true;
}

function storable(event: PaymentEvent) {
  return {
    id: event.id,
    type: event.type,
    objectId: event.objectId ?? '',
    createdAt: event.createdAt,
    reference: metadata.parse(event.snapshot['metadata']),
  };
}

function refuseForged(error: unknown): never {
  if (error instanceof PaymentServiceError && error.kind === 'bad-signature') {
    throw new AppError('invalid-input', { detail: 'The signature does not fit.', cause: error });
  }
  throw error;
}

/** Stores a signed event by its id; processing is a job. Throws when it is forged or cannot be stored. */
export async function receivePaymentEvent(
  db: Database,
  rawBody: string | Buffer,
  signature: string | null,
  payments: Payments = paymentService(),
): Promise<void> {
  let event: PaymentEvent;
  try {
    event = payments.constructEvent(rawBody, signature);
  } catch (error) {
    refuseForged(error);
  }
  await transact(db, (tx) => store(tx, storable(event), 'payments', 'webhook'));
}

/** The same for thin events about payout accounts, which name the account only. */
export async function receiveAccountEvent(
  db: Database,
  rawBody: string | Buffer,
  signature: string | null,
  payments: Payments = paymentService(),
): Promise<void> {
  let event: AccountEvent;
  try {
    event = payments.parseAccountEvent(rawBody, signature);
  } catch (error) {
    refuseForged(error);
  }
  await transact(db, (tx) =>
    store(tx, { ...event, objectId: event.accountId ?? '', reference: {} }, 'accounts', 'webhook'),
  );
}

/** What an event makes us look at; the state itself is asked from the service. False: nothing of ours. */
async function act(db: Database, payments: Payments, row: PaymentEventRow): Promise<boolean> {
  if (row.endpoint === 'accounts') {
    if (!row.objectId) return false;
    await syncPayoutAccount(db, payments, row.objectId);
    return true;
  }
  switch (row.type) {
    case 'checkout.session.completed':
    case 'checkout.session.async_payment_succeeded':
    case 'checkout.session.expired':
      await syncSession(db, payments, row.objectId);
      return true;
    case 'checkout.session.async_payment_failed':
      await failSession(db, payments, row.objectId);
      return true;
    case 'payment_intent.payment_failed': {
      const milestoneId = row.reference['milestone'];
      if (!milestoneId) return false;
      await noteDeclined(db, milestoneId, row.id);
      return true;
    }
    case 'refund.created':
    case 'refund.updated':
    case 'refund.failed':
      await syncRefund(db, payments, row.objectId);
      return true;
    case 'transfer.created':
    case 'transfer.reversed':
      await syncTransfer(db, payments, row.objectId);
      return true;
    case 'charge.dispute.created':
    case 'charge.dispute.updated':
    case 'charge.dispute.closed':
    case 'charge.dispute.funds_withdrawn':
    case 'charge.dispute.funds_reinstated':
      await syncChargeBack(db, payments, row.objectId);
      return true;
    default:
      return false;
  }
}

/** Processes a stored event; safe to run again after a crash at any point. */
export async function processPaymentEvent(
  db: Database,
  eventId: string,
  payments: Payments = paymentService(),
): Promise<void> {
  const [row] = await db.select().from(paymentEvent).where(eq(paymentEvent.id, eventId));
  if (!row || row.state !== 'received') return;
  let state: 'processed' | 'ignored' | 'quarantined';
  let note = '';
  try {
    state = (await act(db, payments, row)) ? 'processed' : 'ignored';
  } catch (error) {
    // What does not exist, here or there, will not come by trying again.
    const gone =
      (error instanceof PaymentServiceError && error.kind === 'missing') ||
      (error instanceof AppError && error.code === 'not-found');
    if (!gone) throw error;
    state = 'quarantined';
    note = error.message.slice(0, 300);
  }
  await db
    .update(paymentEvent)
    .set({ state, note, processedAt: await businessNow(db) })
    .where(and(eq(paymentEvent.id, eventId), eq(paymentEvent.state, 'received')));
}

export async function paymentEventHandler(payload: { eventId: string }, context: JobContext): Promise<void> {
  await processPaymentEvent(context.db, payload.eventId);
}

const backfillKey = 'payments-backfilled-to';
/** The service keeps its events for thirty days. */
const keptMs = 30 * dayMs - 3_600_000;
/** Events may appear late and clocks differ: each run looks back over the last hour again. */
const overlapMs = 3_600_000;

/**
 * Fetches the events that webhooks may have missed and processes what is new; also finishes events that
 * were stored and whose job is gone. Returns how many were new.
 */
export async function backfillEvents(
  db: Database,
  options: { payments?: Payments; everyMs?: number; signal?: AbortSignal } = {},
): Promise<number> {
  const payments = options.payments ?? paymentService();
  const now = realNow();
  const [any] = await db.select({ id: paymentOperation.id }).from(paymentOperation).limit(1);
  if (!any) return 0;
  const [mark] = await db.select().from(setting).where(eq(setting.key, backfillKey));
  const last = mark ? Number(mark.value) : 0;
  if (options.everyMs !== undefined && now - last < options.everyMs) return 0;
  let fresh = 0;
  const from = Math.max(last - overlapMs, now - keptMs);
  const events: PaymentEvent[] = [];
  for await (const event of payments.listEvents({ from })) events.push(event);
  for (const event of events.reverse()) {
    if (options.signal?.aborted) return fresh;
    if (await transact(db, (tx) => store(tx, storable(event), 'payments', 'backfill'))) fresh += 1;
  }
  await db
    .insert(setting)
    .values({ key: backfillKey, value: String(now) })
    .onConflictDoUpdate({ target: setting.key, set: { value: String(now) } });
  return fresh;
}

/** Stored events whose job came to nothing are taken up again. */
export async function retryLeftEvents(db: Database, olderThanMs = 600_000): Promise<void> {
  const left = await db
    .select({ id: paymentEvent.id })
    .from(paymentEvent)
    .where(
      and(
        eq(paymentEvent.state, 'received'),
        lte(paymentEvent.receivedAt, (await businessNow(db)) - olderThanMs),
      ),
    )
    .orderBy(asc(paymentEvent.receivedAt))
    .limit(50);
  for (const { id } of left) {
    await enqueueJob(
      db,
      paymentEventJob,
      { eventId: id },
      { dedupeKey: `${id}/again-${Math.floor(realNow() / olderThanMs)}` },
    );
  }
}
