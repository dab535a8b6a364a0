import { eq } from 'drizzle-orm';
import { payout } from '../../domain/fees.ts';
import { AppError } from '../../domain/errors.ts';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { payoutAccount } from '../db/schema/money.ts';
import { moveMoney, orderNumberText, type MilestoneRow, type OrderRow } from '../orders/index.ts';
import { refundPurpose, releasePurpose } from './close-money.ts';
import { heldBalance } from './ledger.ts';
import { planOperation } from './operations.ts';
import type { RefundRequest } from './refund-operations.ts';
import { fundingOf } from './sessions.ts';
import type { TransferRequest } from './transfer-operations.ts';

/** Plans the transfer of `release` to the fabricator, less the platform fee. */
export async function planTransfer(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  release: number,
): Promise<void> {
  const [account] = await tx
    .select()
    .from(payoutAccount)
    .where(eq(payoutAccount.companyId, order.fabricatorCompanyId));
  if (!account?.accountId) throw new AppError('payout-not-ready');
  const funding = await fundingOf(tx, row.id);
  const { net, fee } = payout({
    amount: row.amount,
    feeBase: row.feeBase,
    release,
    basisPoints: order.feeBasisPoints,
  });
  const request: TransferRequest = {
    milestoneId: row.id,
    orderId: order.id,
    companyId: order.fabricatorCompanyId,
    gross: release,
    fee,
    net,
    currency: order.currency,
    destinationId: account.accountId,
    sourceChargeId: funding?.chargeId ?? null,
    description: `${milestoneKindText[row.kind]} milestone of order ${orderNumberText(order)}`,
  };
  await planOperation(tx, {
    purpose: releasePurpose(row.id),
    kind: 'transfer',
    orderId: order.id,
    milestoneId: row.id,
    companyId: order.fabricatorCompanyId,
    request: { ...request },
  });
}

export async function planRefund(tx: Tx, order: OrderRow, row: MilestoneRow, amount: number): Promise<void> {
  const funding = await fundingOf(tx, row.id);
  if (!funding?.chargeId) throw new Error(`milestone ${row.id} is held without a payment`);
  const request: RefundRequest = {
    orderId: order.id,
    milestoneId: row.id,
    chargeId: funding.chargeId,
    amount,
    currency: order.currency,
    reason: `${milestoneKindText[row.kind]} milestone of order ${orderNumberText(order)}`,
  };
  await planOperation(tx, {
    purpose: refundPurpose(row.id),
    kind: 'refund',
    orderId: order.id,
    milestoneId: row.id,
    request: { ...request },
  });
}

/**
 * Lets the held money of a milestone go: `release` to the fabricator (less fee), `refund` to the buyer.
 * Both are minor units and add up to exactly what is held. Only one such move ever starts: the money
 * column leaves `held` in the same transaction, and every other attempt finds that.
 */
export async function moveHeldMoney(
  tx: Tx,
  by: By,
  order: OrderRow,
  row: MilestoneRow,
  parts: { release: number; refund: number },
): Promise<void> {
  const held = await heldBalance(tx, row.id);
  for (const part of [parts.release, parts.refund]) {
    if (!Number.isSafeInteger(part) || part < 0) throw new RangeError(`not an amount: ${part}`);
  }
  if (parts.release + parts.refund !== held || held === 0) {
    throw new AppError('state-conflict', {
      detail: `Release and refund have to add up to what is held (${held} minor units).`,
    });
  }
  const set = { releaseAmount: parts.release, refundAmount: parts.refund, attention: null };
  const event = parts.refund === 0 ? 'release' : parts.release === 0 ? 'refund' : 'split';
  await moveMoney(tx, by, row, event, set);
  if (parts.release > 0) await planTransfer(tx, order, row, parts.release);
  if (parts.refund > 0) await planRefund(tx, order, row, parts.refund);
}
