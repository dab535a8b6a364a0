import { and, eq, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates } from '../../domain/dispute-states.ts';
import { AppError } from '../../domain/errors.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { settlementOffer } from '../db/schema/disputes.ts';
import { heldBalance } from '../money/index.ts';
import { tell } from '../orders/index.ts';
import { moveDispute } from './move.ts';
import { carryOut, milestoneName, splitText } from './outcome.ts';
import { caseFor, type DisputeCase } from './queries.ts';

/** The two parts have to make exactly what is held. */
export async function requireWhole(
  tx: Tx,
  found: Pick<DisputeCase, 'milestone' | 'order'>,
  split: { release: number; refund: number },
): Promise<void> {
  const held = await heldBalance(tx, found.milestone.id);
  const whole = [split.release, split.refund].every((part) => Number.isSafeInteger(part) && part >= 0);
  if (!whole || split.release + split.refund !== held) {
    const message = `Release and refund have to add up to exactly what is held (${splitText(found, { release: held, refund: 0 }).split(',')[0]?.replace('release ', '')}).`;
    throw new AppError('invalid-input', { detail: message, fields: { release: message } });
  }
}

/** Offers the other side how to split the held money; replaces one's own earlier offer. */
export async function offerSettlement(
  db: Database,
  actor: Actor | null,
  input: { disputeId: string; release: number; refund: number; note: string; commandId: string },
): Promise<{ offerId: string }> {
  return transact(db, async (tx) => {
    const found = await caseFor(tx, actor, 'order.dispute', input.disputeId);
    const { dispute, order, side, by, companyId } = found;
    const [again] = await tx
      .select()
      .from(settlementOffer)
      .where(eq(settlementOffer.commandId, input.commandId));
    if (again) return { offerId: again.id };
    if (!openDisputeStates.includes(dispute.state)) {
      throw new AppError('state-conflict', { detail: 'This dispute has ended.' });
    }
    await requireWhole(tx, found, input);
    await tx
      .update(settlementOffer)
      .set({ state: 'replaced' })
      .where(
        and(
          eq(settlementOffer.disputeId, dispute.id),
          eq(settlementOffer.companyId, companyId),
          eq(settlementOffer.state, 'open'),
        ),
      );
    const offerId = newId();
    await tx.insert(settlementOffer).values({
      id: offerId,
      disputeId: dispute.id,
      companyId,
      offeredBy: by.userId,
      offeredAt: await businessNow(tx),
      releaseAmount: input.release,
      refundAmount: input.refund,
      note: input.note.trim(),
      state: 'open',
      commandId: input.commandId,
    });
    await audit(tx, by, {
      action: 'settlement.offer',
      subjectType: 'dispute',
      subjectId: dispute.id,
      companyId,
      detail: { release: input.release, refund: input.refund },
    });
    await tell(tx, order, {
      kind: 'settlement-offered',
      by,
      side,
      milestoneId: dispute.milestoneId,
      text: `A settlement was offered: ${splitText(found, input)}.`,
      subject: 'settlement offered',
      ...(input.note.trim() ? { paragraphs: [input.note.trim()] } : {}),
      action: 'Look at the offer',
      anchor: 'dispute',
      buyer: ['purchaser'],
      fabricator: ['estimator'],
    });
    return { offerId };
  });
}

/** The other side accepts an offer: the dispute is settled, and the money moves at once. */
export async function answerOffer(
  db: Database,
  actor: Actor | null,
  input: { offerId: string; answer: 'accept' | 'decline' },
): Promise<void> {
  await transact(db, async (tx) => {
    const [offer] = await tx.select().from(settlementOffer).where(eq(settlementOffer.id, input.offerId));
    if (!offer) throw new AppError('not-found');
    const found = await caseFor(tx, actor, 'order.dispute', offer.disputeId);
    const { dispute, order, side, by, companyId } = found;
    requireVerifiedEmail(by);
    if (offer.companyId === companyId) {
      throw new AppError('not-allowed', { detail: 'The other side has to answer your offer.' });
    }
    const result = await tx
      .update(settlementOffer)
      .set({
        state: input.answer === 'accept' ? 'accepted' : 'declined',
        version: sql`${settlementOffer.version} + 1`,
      })
      .where(and(eq(settlementOffer.id, offer.id), eq(settlementOffer.state, 'open')));
    if (result.rowsAffected !== 1) {
      throw new AppError('state-conflict', { detail: 'This offer is no longer open.' });
    }
    const split = { release: offer.releaseAmount, refund: offer.refundAmount };
    if (input.answer === 'accept') {
      await requireWhole(tx, found, split);
      await moveDispute(tx, by, dispute, 'settle', {
        closedAt: await businessNow(tx),
        releaseAmount: split.release,
        refundAmount: split.refund,
      });
    }
    await tell(tx, order, {
      kind: input.answer === 'accept' ? 'dispute-settled' : 'settlement-declined',
      by,
      side,
      milestoneId: dispute.milestoneId,
      text:
        input.answer === 'accept'
          ? `The dispute on the ${milestoneName(found)} milestone was settled by both: ${splitText(found, split)}.`
          : `The offered settlement (${splitText(found, split)}) was declined.`,
      subject: input.answer === 'accept' ? 'dispute settled' : 'settlement declined',
      action: 'Open the dispute',
      anchor: 'dispute',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
    if (input.answer === 'accept') await carryOut(tx, by, found, split);
  });
}
