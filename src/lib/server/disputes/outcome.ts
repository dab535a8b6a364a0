import { and, eq } from 'drizzle-orm';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import { formatMoney } from '../../domain/money.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { settlementOffer } from '../db/schema/disputes.ts';
import { heldBalance, moveHeldMoney, raiseAlarm } from '../money/index.ts';
import { acceptPieces, moveWork, openWhatCanStart, resumeClocks, unsafeMilestone } from '../orders/index.ts';
import type { DisputeCase } from './queries.ts';

export interface Split {
  release: number;
  refund: number;
}

/**
 * Carries out what stands in the end: the held money moves, the work of the milestone is closed (accepted
 * where anything is released, cancelled where all goes back), and the clocks run again. The dispute has
 * been moved to its last state before.
 */
export async function carryOut(tx: Tx, by: By, found: DisputeCase, split: Split): Promise<void> {
  const { order } = found;
  await overtakeOffers(tx, found.dispute.id);
  const row = await unsafeMilestone(tx, found.milestone.id);
  const held = await heldBalance(tx, row.id);
  if (row.money !== 'held' || held !== split.release + split.refund) {
    // The bank took the payment back meanwhile; a person has to see how the decision can be met.
    await raiseAlarm(tx, {
      key: `outcome-unpayable:${found.dispute.id}`,
      kind: 'outcome-unpayable',
      orderId: order.id,
      milestoneId: row.id,
      detail: `The outcome (release ${split.release}, refund ${split.refund}) meets ${held} held in state ${row.money}.`,
    });
  } else {
    if (row.work === 'open' || row.work === 'submitted') {
      const event = split.release > 0 ? 'conclude' : 'cancel';
      if (row.kind === 'build' && event === 'conclude') await acceptPieces(tx, by, order.id);
      await moveWork(tx, by, row, event, event === 'conclude' ? { acceptedAt: await businessNow(tx) } : {});
    }
    await moveHeldMoney(tx, by, order, await unsafeMilestone(tx, row.id), split);
  }
  await resumeClocks(tx, by, order.id);
  await openWhatCanStart(tx, by, order.id);
}

export async function overtakeOffers(tx: Tx, disputeId: string): Promise<void> {
  await tx
    .update(settlementOffer)
    .set({ state: 'overtaken' })
    .where(and(eq(settlementOffer.disputeId, disputeId), eq(settlementOffer.state, 'open')));
}

/** Words for a split, e.g. `release EUR 120.00, refund EUR 80.00`. */
export function splitText(found: Pick<DisputeCase, 'order'>, split: Split): string {
  const { currency } = found.order;
  return `release ${formatMoney({ amount: split.release, currency })}, refund ${formatMoney({ amount: split.refund, currency })}`;
}

export function milestoneName(found: Pick<DisputeCase, 'milestone'>): string {
  return milestoneKindText[found.milestone.kind].toLowerCase();
}
