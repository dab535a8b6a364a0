import { payout } from '../../domain/fees.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { finishIfDone, moveMoney, setAttention, unsafeMilestone, unsafeOrder } from '../orders/index.ts';
import { isBooked } from './ledger.ts';
import { latestOperation } from './operations.ts';
import { tellRefunded, tellReleased, tellSplit } from './tell-money.ts';

/** Purposes of the two ways money leaves a milestone; each happens once. */
export const releasePurpose = (milestoneId: string) => `release:${milestoneId}`;
export const refundPurpose = (milestoneId: string) => `refund:${milestoneId}`;

async function refundSucceeded(tx: Tx, milestoneId: string): Promise<boolean> {
  const op = await latestOperation(tx, refundPurpose(milestoneId));
  return op?.state === 'known' && op.result?.['status'] === 'succeeded';
}

/**
 * Brings the money of a milestone to its end once all its legs are certain: released, refunded, or
 * split when both legs are. `transferKnown` and `refundStatus` tell of the operation just being booked.
 */
export async function closeMoneyIfDone(
  tx: Tx,
  by: By,
  milestoneId: string,
  news: { transferKnown?: boolean; refundStatus?: string } = {},
): Promise<void> {
  const row = await unsafeMilestone(tx, milestoneId);
  const paid = news.transferKnown ?? (await isBooked(tx, releasePurpose(milestoneId)));
  const refunded =
    news.refundStatus === undefined
      ? await refundSucceeded(tx, milestoneId)
      : news.refundStatus === 'succeeded';
  const order = await unsafeOrder(tx, row.orderId);
  const set = { closedAt: await businessNow(tx), attention: null };
  const parts = {
    amount: row.amount,
    feeBase: row.feeBase,
    release: row.releaseAmount,
    basisPoints: order.feeBasisPoints,
  };
  if (row.money === 'releasing' && paid) {
    await moveMoney(tx, by, row, 'released', set);
    await tellReleased(tx, order, row, payout(parts));
  } else if (row.money === 'refunding' && refunded) {
    await moveMoney(tx, by, row, 'refunded', set);
    await tellRefunded(tx, order, row, row.refundAmount);
  } else if (row.money === 'splitting' && paid && refunded) {
    await moveMoney(tx, by, row, 'split-done', set);
    await tellSplit(tx, order, row, payout(parts), row.refundAmount);
  } else {
    if (news.transferKnown && row.attention === 'payee-restricted') await setAttention(tx, row.id, null);
    return;
  }
  await finishIfDone(tx, by, row.orderId);
}
