import { eq } from 'drizzle-orm';
import { payout } from '../../domain/fees.ts';
import type { Payments, Refund, Transfer } from '../adapters/payments.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { paymentSession } from '../db/schema/money.ts';
import {
  moveMoney,
  setAttention,
  unsafeMilestone,
  unsafeOrder,
  type MilestoneRow,
  type OrderRow,
} from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { refundPurpose, releasePurpose } from './close-money.ts';
import { bookAnswer } from './execute.ts';
import type { OperationHandler } from './handler.ts';
import { heldBalance, isBooked, postLedger } from './ledger.ts';
import { moveHeldMoney } from './move-held.ts';
import { latestOperation, operationOf, updateOperation } from './operations.ts';
import { applyRefund, refundHandler } from './refund-operations.ts';
import { transferHandler } from './transfer-operations.ts';

/**
 * A transfer the service tells of. It may be the first word of our own call whose answer got lost; or,
 * in a database restored from an older backup, a release this database does not know of yet.
 */
export async function syncTransfer(db: Database, payments: Payments, transferId: string): Promise<void> {
  const transfer = await payments.retrieveTransfer(transferId);
  const op = await operationOf(db, transfer.metadata);
  if (op) {
    if (op.state !== 'known')
      await bookAnswer(db, op, transferHandler as OperationHandler<unknown>, transfer);
    if (transfer.amountReversed > 0) await noteReversal(db, transfer);
    return;
  }
  const milestoneId = transfer.metadata['milestone'];
  await transact(db, async (tx) => {
    if (!milestoneId || transfer.metadata['purpose'] !== releasePurpose(milestoneId)) {
      await raiseAlarm(tx, {
        key: `unknown-transfer:${transfer.id}`,
        kind: 'unknown-transfer',
        objectId: transfer.id,
        detail: `A transfer of ${transfer.amount} ${transfer.currency} to ${transfer.destinationId ?? 'nobody'} that we did not ask for.`,
      });
      return;
    }
    await adoptRelease(tx, milestoneId, transfer);
  });
  const adopted = await operationOf(db, transfer.metadata);
  if (adopted && adopted.state !== 'known') {
    await bookAnswer(db, adopted, transferHandler as OperationHandler<unknown>, transfer);
  }
}

/** Takes over a release that is real at the service and unknown here; only when it is a whole one. */
async function adoptRelease(tx: Tx, milestoneId: string, transfer: Transfer): Promise<void> {
  const row = await unsafeMilestone(tx, milestoneId);
  const order = await unsafeOrder(tx, row.orderId);
  await raiseAlarm(tx, {
    key: `adopted-transfer:${transfer.id}`,
    kind: 'adopted-transfer',
    orderId: order.id,
    milestoneId,
    objectId: transfer.id,
    detail: `Transfer ${transfer.id} was made before this database was restored; it was taken over.`,
  });
  const held = await heldBalance(tx, milestoneId);
  const whole = payout({
    amount: row.amount,
    feeBase: row.feeBase,
    release: held,
    basisPoints: order.feeBasisPoints,
  });
  if (row.money !== 'held' || whole.net !== transfer.amount) return;
  await moveHeldMoney(tx, 'system', order, row, { release: held, refund: 0 });
}

/** The fabricator's account gave a payout back (by the platform's staff at the service). */
async function noteReversal(db: Database, transfer: Transfer): Promise<void> {
  await raiseAlarm(db, {
    key: `transfer-reversed:${transfer.id}:${transfer.amountReversed}`,
    kind: 'transfer-reversed',
    milestoneId: transfer.metadata['milestone'] ?? null,
    orderId: transfer.metadata['order'] ?? null,
    objectId: transfer.id,
    detail: `${transfer.amountReversed} ${transfer.currency} of transfer ${transfer.id} came back. Book it by hand after clearing it up.`,
  });
}

export async function syncRefund(db: Database, payments: Payments, refundId: string): Promise<void> {
  const refund = await payments.retrieveRefund(refundId);
  const op = await operationOf(db, refund.metadata);
  if (!op) {
    await transact(db, (tx) => outsideRefund(tx, refund));
    return;
  }
  if (op.state !== 'known') {
    await bookAnswer(db, op, refundHandler as OperationHandler<unknown>, refund);
    return;
  }
  await transact(db, async (tx) => {
    const fresh = await operationOf(tx, refund.metadata);
    if (!fresh) return;
    if (fresh.result?.['status'] === refund.status) return;
    await applyRefund(tx, fresh, refund);
    await updateOperation(tx, fresh, { result: { status: refund.status } });
  });
}

/** A refund that we did not ask for: somebody made it at the service, or before a restore. */
async function outsideRefund(tx: Tx, refund: Refund): Promise<void> {
  if (!refund.chargeId || !refund.balanceTransactionId || (await isBooked(tx, `refund:${refund.id}`))) return;
  const [session] = await tx
    .select()
    .from(paymentSession)
    .where(eq(paymentSession.chargeId, refund.chargeId));
  await raiseAlarm(tx, {
    key: `outside-refund:${refund.id}`,
    kind: 'outside-refund',
    orderId: session?.orderId ?? null,
    milestoneId: session?.milestoneId ?? null,
    objectId: refund.id,
    detail: `A refund of ${refund.amount} ${refund.currency} on ${refund.chargeId} that we did not ask for.`,
  });
  if (!session || session.state !== 'paid') return;
  const row = await unsafeMilestone(tx, session.milestoneId);
  await bookOutside(tx, await unsafeOrder(tx, row.orderId), row, refund);
}

async function bookOutside(tx: Tx, order: OrderRow, row: MilestoneRow, refund: Refund): Promise<void> {
  const held = row.money === 'held' ? Math.min(refund.amount, await heldBalance(tx, row.id)) : 0;
  const known = await latestOperation(tx, refundPurpose(row.id));
  await postLedger(tx, {
    opKey: `refund:${refund.id}`,
    kind: 'outside-refund',
    orderId: order.id,
    milestoneId: row.id,
    currency: refund.currency,
    reason: 'A refund made outside the order',
    objectId: refund.id,
    lines: [
      { account: { kind: 'held', milestoneId: row.id }, debit: held },
      {
        account: { kind: 'receivable', companyId: order.fabricatorCompanyId },
        debit: refund.amount - held,
      },
      {
        account: { kind: 'clearing' },
        credit: refund.amount,
        balanceTransactionId: refund.balanceTransactionId,
      },
    ],
  });
  if (held > 0 && (await heldBalance(tx, row.id)) === 0 && !known) {
    await moveMoney(tx, 'system', row, 'refund', { refundAmount: held });
    await moveMoney(tx, 'system', await unsafeMilestone(tx, row.id), 'refunded');
    return;
  }
  if (row.money !== 'held') await setAttention(tx, row.id, 'refund-after-release');
}
