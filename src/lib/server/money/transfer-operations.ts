import { z } from 'zod';
import type { AttentionReason } from '../../domain/milestone-states.ts';
import { currencies } from '../../domain/money.ts';
import type { PaymentServiceError, Transfer } from '../adapters/payments.ts';
import type { Tx } from '../db/index.ts';
import { setAttention, unsafeMilestone, unsafeOrder } from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { AnswerDiffers, type OperationHandler } from './handler.ts';
import { postLedger } from './ledger.ts';
import { metadataOf } from './operations.ts';
import { closeMoneyIfDone } from './close-money.ts';
import { tellPayeeRestricted } from './tell-money.ts';

export const transferRequest = z.object({
  milestoneId: z.string(),
  orderId: z.string(),
  companyId: z.string(),
  /** What leaves the held account, and how it is shared. */
  gross: z.number().int().positive(),
  fee: z.number().int().nonnegative(),
  net: z.number().int().positive(),
  currency: z.enum(currencies),
  destinationId: z.string(),
  sourceChargeId: z.string().nullable(),
  description: z.string(),
});
export type TransferRequest = z.output<typeof transferRequest>;

/** Books a transfer that is there at the service; a second booking of the same milestone does nothing. */
export async function bookTransfer(tx: Tx, request: TransferRequest, transfer: Transfer): Promise<void> {
  if (
    transfer.amount !== request.net ||
    transfer.currency !== request.currency ||
    transfer.destinationId !== request.destinationId
  ) {
    throw new AnswerDiffers(
      `Transfer ${transfer.id} is ${transfer.amount} ${transfer.currency} to ${transfer.destinationId}; asked was ${request.net} ${request.currency} to ${request.destinationId}.`,
    );
  }
  const payable = { kind: 'payable', companyId: request.companyId } as const;
  await postLedger(tx, {
    opKey: `release:${request.milestoneId}`,
    kind: 'release',
    orderId: request.orderId,
    milestoneId: request.milestoneId,
    currency: request.currency,
    reason: request.description,
    objectId: transfer.id,
    lines: [
      { account: { kind: 'held', milestoneId: request.milestoneId }, debit: request.gross },
      { account: { kind: 'platform-fee' }, credit: request.fee },
      { account: payable, credit: request.net },
      { account: payable, debit: request.net },
      {
        account: { kind: 'clearing' },
        credit: request.net,
        balanceTransactionId: transfer.balanceTransactionId,
      },
    ],
  });
}

const attentionOf: Partial<Record<PaymentServiceError['kind'], AttentionReason>> = {
  'payee-restricted': 'payee-restricted',
  'insufficient-balance': 'balance-insufficient',
  missing: 'payee-restricted',
};

export const transferHandler: OperationHandler<Transfer> = {
  call(payments, op) {
    const request = transferRequest.parse(op.request);
    return payments.createTransfer({
      idempotencyKey: op.key,
      amount: request.net,
      currency: request.currency,
      destinationId: request.destinationId,
      transferGroup: request.orderId,
      metadata: metadataOf(op),
      ...(request.sourceChargeId ? { sourceChargeId: request.sourceChargeId } : {}),
      description: request.description,
    });
  },

  async find(payments, op) {
    const request = transferRequest.parse(op.request);
    // Any generation of this purpose counts: it must happen once.
    return (await payments.findTransfers(request.orderId)).find((t) => t.metadata['purpose'] === op.purpose);
  },

  async apply(tx, op, transfer) {
    const request = transferRequest.parse(op.request);
    await bookTransfer(tx, request, transfer);
    await closeMoneyIfDone(tx, 'system', request.milestoneId, { transferKnown: true });
    return { objectId: transfer.id, result: { status: 'paid' } };
  },

  async refused(tx, op, error) {
    const request = transferRequest.parse(op.request);
    const attention = attentionOf[error.kind] ?? 'transfer-refused';
    await setAttention(tx, request.milestoneId, attention);
    const order = await unsafeOrder(tx, request.orderId);
    if (attention === 'payee-restricted') {
      await tellPayeeRestricted(tx, order, await unsafeMilestone(tx, request.milestoneId), op.id);
      return;
    }
    await raiseAlarm(tx, {
      key: `transfer-refused:${op.id}`,
      kind: attention,
      orderId: request.orderId,
      milestoneId: request.milestoneId,
      detail: `The payment service refused the payout: ${error.message}`,
    });
  },
};
