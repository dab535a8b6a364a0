import { z } from 'zod';
import { currencies } from '../../domain/money.ts';
import type { PaymentServiceError, Refund } from '../adapters/payments.ts';
import type { Tx } from '../db/index.ts';
import { moveMoney, setAttention, unsafeMilestone, unsafeOrder } from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { closeMoneyIfDone } from './close-money.ts';
import { AnswerDiffers, type OperationHandler } from './handler.ts';
import { isBooked, postLedger, type AccountRef } from './ledger.ts';
import { metadataOf, updateOperation, type OperationRow } from './operations.ts';
import { tellRefundFailed } from './tell-money.ts';

export const refundRequest = z.object({
  orderId: z.string(),
  /** null for a payment that no milestone holds (a second one, or one that differs). */
  milestoneId: z.string().nullable(),
  chargeId: z.string(),
  amount: z.number().int().positive(),
  currency: z.enum(currencies),
  reason: z.string(),
});
export type RefundRequest = z.output<typeof refundRequest>;

function sourceOf(request: RefundRequest): AccountRef {
  return request.milestoneId
    ? { kind: 'held', milestoneId: request.milestoneId }
    : { kind: 'unallocated', orderId: request.orderId };
}

/**
 * Books what a refund is at the service now: its money leaving the balance, and coming back when it
 * failed. Safe to call with any later state of the same refund, in any order and any number of times.
 */
export async function bookRefund(tx: Tx, request: RefundRequest, refund: Refund): Promise<void> {
  const surplus = request.milestoneId === null;
  const base = {
    orderId: request.orderId,
    milestoneId: request.milestoneId,
    currency: request.currency,
    objectId: refund.id,
  };
  if (refund.balanceTransactionId) {
    await postLedger(tx, {
      ...base,
      opKey: `refund:${refund.id}`,
      kind: surplus ? 'surplus-refund' : 'refund',
      reason: request.reason,
      lines: [
        { account: sourceOf(request), debit: refund.amount },
        {
          account: { kind: 'clearing' },
          credit: refund.amount,
          balanceTransactionId: refund.balanceTransactionId,
        },
      ],
    });
  }
  if (refund.failureBalanceTransactionId && (await isBooked(tx, `refund:${refund.id}`))) {
    await postLedger(tx, {
      ...base,
      opKey: `refund-failed:${refund.id}`,
      kind: surplus ? 'surplus-refund-failed' : 'refund-failed',
      reason: `The refund came back: ${refund.failureReason ?? 'no reason given'}`,
      lines: [
        {
          account: { kind: 'clearing' },
          debit: refund.amount,
          balanceTransactionId: refund.failureBalanceTransactionId,
        },
        { account: sourceOf(request), credit: refund.amount },
      ],
    });
  }
}

function assertAsAsked(request: RefundRequest, refund: Refund): void {
  if (
    refund.amount !== request.amount ||
    refund.currency !== request.currency ||
    refund.chargeId !== request.chargeId
  ) {
    throw new AnswerDiffers(
      `Refund ${refund.id} is ${refund.amount} ${refund.currency} of ${refund.chargeId}; asked was ${request.amount} ${request.currency} of ${request.chargeId}.`,
    );
  }
}

/** Brings milestone and operation in line with the refund's present state at the service. */
export async function applyRefund(tx: Tx, op: OperationRow, refund: Refund): Promise<void> {
  const request = refundRequest.parse(op.request);
  assertAsAsked(request, refund);
  await bookRefund(tx, request, refund);
  const failed = refund.status === 'failed' || refund.status === 'canceled';
  await updateOperation(tx, op, { objectId: refund.id, result: { status: refund.status } });
  if (!request.milestoneId) {
    if (failed) await alarmFailed(tx, op, request, refund);
    return;
  }
  if (!failed) {
    await closeMoneyIfDone(tx, 'system', request.milestoneId, { refundStatus: refund.status });
    return;
  }
  const row = await unsafeMilestone(tx, request.milestoneId);
  if (row.money === 'refunded') await moveMoney(tx, 'system', row, 'refund-failed', { closedAt: null });
  if (row.money === 'split') await moveMoney(tx, 'system', row, 'split-refund-failed', { closedAt: null });
  await setAttention(tx, row.id, 'refund-failed');
  await tellRefundFailed(tx, await unsafeOrder(tx, request.orderId), row, refund.id);
  await alarmFailed(tx, op, request, refund);
}

async function alarmFailed(tx: Tx, op: OperationRow, request: RefundRequest, refund: Refund): Promise<void> {
  await raiseAlarm(tx, {
    key: `refund-failed:${refund.id}`,
    kind: 'refund-failed',
    orderId: request.orderId,
    milestoneId: request.milestoneId,
    objectId: refund.id,
    detail: `Refund ${refund.id} came back (${refund.failureReason ?? refund.status}). Agree on another way with the buyer, then have it tried again.`,
  });
}

export const refundHandler: OperationHandler<Refund> = {
  call(payments, op) {
    const request = refundRequest.parse(op.request);
    return payments.createRefund({
      idempotencyKey: op.key,
      chargeId: request.chargeId,
      amount: request.amount,
      metadata: metadataOf(op),
    });
  },

  async find(payments, op) {
    const request = refundRequest.parse(op.request);
    // A refund of an earlier generation that failed is no effect; one that stands is.
    return (await payments.findRefunds(request.chargeId)).find(
      (refund) =>
        refund.metadata['purpose'] === op.purpose &&
        (refund.metadata['generation'] === String(op.generation) ||
          !['failed', 'canceled'].includes(refund.status)),
    );
  },

  async apply(tx, op, refund) {
    await applyRefund(tx, op, refund);
    return { objectId: refund.id, result: { status: refund.status } };
  },

  async refused(tx, op, error: PaymentServiceError) {
    const request = refundRequest.parse(op.request);
    if (request.milestoneId) await setAttention(tx, request.milestoneId, 'refund-refused');
    await raiseAlarm(tx, {
      key: `refund-refused:${op.id}`,
      kind: 'refund-refused',
      orderId: request.orderId,
      milestoneId: request.milestoneId,
      objectId: request.chargeId,
      detail: `The payment service refused a refund: ${error.message}`,
    });
  },
};
