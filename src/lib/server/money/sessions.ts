import { and, eq, inArray, ne } from 'drizzle-orm';
import type { Charge, CheckoutSession, Payments } from '../adapters/payments.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { paymentSession } from '../db/schema/money.ts';
import {
  moveMoney,
  openWhatCanStart,
  resumeAfterFunding,
  setAttention,
  unsafeMilestone,
  unsafeOrder,
  type MilestoneRow,
} from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { updateSession, type SessionRow } from './checkout-operations.ts';
import { postLedger } from './ledger.ts';
import { operationOf, planOperation, updateOperation } from './operations.ts';
import { tellFunded, tellPaymentFailed } from './tell-money.ts';

export async function sessionByServiceId(reader: Reader, sessionId: string): Promise<SessionRow | undefined> {
  const [row] = await reader.select().from(paymentSession).where(eq(paymentSession.sessionId, sessionId));
  return row;
}

/** Our row of a session: by its id, or by its metadata when the event came before our own answer. */
async function rowOf(tx: Tx, session: CheckoutSession): Promise<SessionRow | undefined> {
  const known = await sessionByServiceId(tx, session.id);
  if (known) return known;
  const op = await operationOf(tx, session.metadata);
  if (!op) return undefined;
  const [row] = await tx.select().from(paymentSession).where(eq(paymentSession.operationId, op.id));
  if (row && row.sessionId === null) {
    await updateSession(tx, row.id, { sessionId: session.id, expiresAt: session.expiresAt });
    await updateOperation(tx, op, {
      state: 'known',
      objectId: session.id,
      result: { status: session.status },
    });
    return { ...row, sessionId: session.id };
  }
  return row;
}

/**
 * Brings a payment in line with what the service says of its session now. Built on the present state,
 * not on the event, so that duplicates, lost and unordered events all end alike.
 */
export async function syncSession(db: Database, payments: Payments, sessionId: string): Promise<void> {
  const session = await payments.retrieveSession(sessionId);
  const charge =
    session.paymentStatus === 'paid' && session.chargeId
      ? await payments.retrieveCharge(session.chargeId)
      : null;
  if (charge && (charge.status !== 'succeeded' || !charge.balanceTransaction)) {
    throw new Error(`the charge of session ${sessionId} is not booked at the service yet`);
  }
  await transact(db, async (tx) => {
    const row = await rowOf(tx, session);
    if (!row) {
      // Not ours, or older than the backup this database was restored from.
      if (charge) await alarmUnknown(tx, session, charge);
      return;
    }
    if (charge) await settlePayment(tx, row, session, charge);
    else if (session.status === 'expired')
      await lapse(tx, row, 'payment-expired', 'expired before it was paid');
    else if (session.status === 'complete' && row.state !== 'processing' && row.state !== 'lapsed') {
      await updateSession(tx, row.id, {
        state: 'processing',
        url: null,
        paymentIntentId: session.paymentIntentId,
      });
    }
  });
}

async function alarmUnknown(tx: Tx, session: CheckoutSession, charge: Charge): Promise<void> {
  await raiseAlarm(tx, {
    key: `unknown-session:${session.id}`,
    kind: 'unknown-payment',
    orderId: session.metadata['order'] ?? null,
    milestoneId: session.metadata['milestone'] ?? null,
    objectId: charge.id,
    detail: `A payment of ${charge.amount} ${charge.currency} (session ${session.id}) has no page of ours.`,
  });
}

/** A payment came to nothing: the milestone can be funded anew. */
async function lapse(
  tx: Tx,
  row: SessionRow,
  attention: 'payment-expired' | 'payment-failed',
  how: string,
): Promise<void> {
  if (!['opening', 'open', 'processing'].includes(row.state)) return;
  await updateSession(tx, row.id, { state: 'lapsed', url: null });
  const milestone = await unsafeMilestone(tx, row.milestoneId);
  if (milestone.money !== 'paying') return;
  await moveMoney(tx, 'system', milestone, 'payment-lapsed', { attention });
  await tellPaymentFailed(tx, await unsafeOrder(tx, row.orderId), milestone, how, `payment-lapsed/${row.id}`);
}

/** The bank debit of a completed session failed later. */
export async function failSession(db: Database, payments: Payments, sessionId: string): Promise<void> {
  const session = await payments.retrieveSession(sessionId);
  if (session.paymentStatus === 'paid') return syncSession(db, payments, sessionId);
  await transact(db, async (tx) => {
    const row = await rowOf(tx, session);
    if (row) await lapse(tx, row, 'payment-failed', 'was refused by the bank');
  });
}

/** A try was declined; the page stays open, the buyer is told once per try. */
export async function noteDeclined(db: Database, milestoneId: string, eventId: string): Promise<void> {
  await transact(db, async (tx) => {
    const milestone = await unsafeMilestone(tx, milestoneId);
    if (milestone.money !== 'paying') return;
    await setAttention(tx, milestone.id, 'payment-failed');
    const order = await unsafeOrder(tx, milestone.orderId);
    await tellPaymentFailed(tx, order, milestone, 'was declined', `payment-declined/${eventId}`);
  });
}

async function settlePayment(
  tx: Tx,
  row: SessionRow,
  session: CheckoutSession,
  charge: Charge,
): Promise<void> {
  if (['paid', 'surplus', 'quarantined'].includes(row.state)) return;
  const milestone = await unsafeMilestone(tx, row.milestoneId);
  const order = await unsafeOrder(tx, row.orderId);
  const set = {
    url: null,
    paymentIntentId: session.paymentIntentId,
    chargeId: charge.id,
    paidAt: await businessNow(tx),
  };
  const differs =
    charge.amount !== row.amount ||
    charge.currency !== row.currency ||
    session.clientReferenceId !== row.milestoneId ||
    charge.metadata['milestone'] !== row.milestoneId;
  if (differs) {
    await updateSession(tx, row.id, { ...set, state: 'quarantined' });
    await bookUnallocated(tx, row, charge, 'A payment that differs from what was asked');
    if (milestone.money === 'paying') await moveMoney(tx, 'system', milestone, 'payment-lapsed');
    await setAttention(tx, milestone.id, 'amount-differs');
    await raiseAlarm(tx, {
      key: `quarantine:${charge.id}`,
      kind: 'payment-differs',
      orderId: row.orderId,
      milestoneId: row.milestoneId,
      objectId: charge.id,
      detail: `Payment ${charge.id} is ${charge.amount} ${charge.currency} for ${charge.metadata['milestone'] ?? 'nobody'}; asked was ${row.amount} ${row.currency} for ${row.milestoneId}. It is set apart.`,
    });
    return;
  }
  const takes =
    (milestone.money === 'paying' || milestone.money === 'unfunded') && milestone.work !== 'cancelled';
  const open = order.state === 'running' || order.state === 'suspended';
  if (!takes || !open) {
    await updateSession(tx, row.id, { ...set, state: 'surplus' });
    await sendBack(tx, row, charge);
    return;
  }
  await updateSession(tx, row.id, { ...set, state: 'paid' });
  await bookFunding(tx, row, charge);
  await moveMoney(tx, 'system', milestone, 'hold', { heldAt: await businessNow(tx), attention: null });
  await closeOtherSessions(tx, row);
  await tellFunded(tx, order, milestone);
  await resumeAfterFunding(tx, 'system', order.id);
  await openWhatCanStart(tx, 'system', order.id);
}

async function bookFunding(tx: Tx, row: SessionRow, charge: Charge): Promise<void> {
  const booked = charge.balanceTransaction;
  if (!booked) throw new Error('no balance transaction');
  await postLedger(tx, {
    opKey: `fund:${row.milestoneId}`,
    kind: 'fund',
    orderId: row.orderId,
    milestoneId: row.milestoneId,
    currency: row.currency,
    reason: 'Paid on the hosted page',
    objectId: charge.id,
    lines: [
      { account: { kind: 'clearing' }, debit: charge.amount, balanceTransactionId: booked.id },
      { account: { kind: 'held', milestoneId: row.milestoneId }, credit: charge.amount },
      { account: { kind: 'processor-fee' }, debit: booked.fee },
      { account: { kind: 'clearing' }, credit: booked.fee, balanceTransactionId: booked.id },
    ],
  });
}

async function bookUnallocated(tx: Tx, row: SessionRow, charge: Charge, reason: string): Promise<void> {
  const booked = charge.balanceTransaction;
  if (!booked) throw new Error('no balance transaction');
  await postLedger(tx, {
    opKey: `surplus:${charge.id}`,
    kind: 'surplus',
    orderId: row.orderId,
    milestoneId: null,
    currency: charge.currency,
    reason,
    objectId: charge.id,
    lines: [
      { account: { kind: 'clearing' }, debit: charge.amount, balanceTransactionId: booked.id },
      { account: { kind: 'unallocated', orderId: row.orderId }, credit: charge.amount },
      { account: { kind: 'processor-fee' }, debit: booked.fee },
      { account: { kind: 'clearing' }, credit: booked.fee, balanceTransactionId: booked.id },
    ],
  });
}

/** A second payment, or one for a milestone that takes none: booked apart and refunded, once. */
async function sendBack(tx: Tx, row: SessionRow, charge: Charge): Promise<void> {
  const reason = 'A payment that no milestone waits for';
  await bookUnallocated(tx, row, charge, reason);
  await planOperation(tx, {
    purpose: `surplus:${charge.id}`,
    kind: 'refund',
    orderId: row.orderId,
    request: {
      orderId: row.orderId,
      milestoneId: null,
      chargeId: charge.id,
      amount: charge.amount,
      currency: charge.currency,
      reason,
    },
  });
}

async function closeOtherSessions(tx: Tx, paid: SessionRow): Promise<void> {
  const others = await tx
    .select()
    .from(paymentSession)
    .where(
      and(
        eq(paymentSession.milestoneId, paid.milestoneId),
        ne(paymentSession.id, paid.id),
        inArray(paymentSession.state, ['opening', 'open']),
      ),
    );
  for (const other of others) {
    await updateSession(tx, other.id, { state: 'lapsed', url: null });
    if (other.sessionId) await planExpire(tx, other);
  }
}

async function planExpire(tx: Tx, row: SessionRow): Promise<void> {
  if (!row.sessionId) return;
  await planOperation(tx, {
    purpose: `expire:${row.sessionId}`,
    kind: 'expire-session',
    orderId: row.orderId,
    milestoneId: row.milestoneId,
    request: { sessionId: row.sessionId },
  });
}

/** Closes the payment page of a milestone that is no longer to be paid (the order ends). */
export async function closePaymentPage(tx: Tx, row: MilestoneRow): Promise<void> {
  const [open] = await tx
    .select()
    .from(paymentSession)
    .where(and(eq(paymentSession.milestoneId, row.id), inArray(paymentSession.state, ['opening', 'open'])));
  if (!open) return;
  await updateSession(tx, open.id, { state: 'lapsed', url: null });
  await planExpire(tx, open);
}

/** The payment that funded a milestone. */
export async function fundingOf(reader: Reader, milestoneId: string): Promise<SessionRow | undefined> {
  const [row] = await reader
    .select()
    .from(paymentSession)
    .where(and(eq(paymentSession.milestoneId, milestoneId), eq(paymentSession.state, 'paid')));
  return row;
}
