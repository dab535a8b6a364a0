import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dayMs, formatInstant } from '../../domain/dates.ts';
import { disputeReasonText, type DisputeReason } from '../../domain/dispute-states.ts';
import { AppError } from '../../domain/errors.ts';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import { formatMoney } from '../../domain/money.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { dispute, disputeFile, disputeStatement } from '../db/schema/disputes.ts';
import { requireCleanFile, shareFile } from '../files/index.ts';
import { heldBalance } from '../money/index.ts';
import {
  companyOf,
  milestoneFor,
  openDisputesOf,
  piecesOf,
  sideOf,
  stopClocks,
  tell,
} from '../orders/index.ts';

export interface OpenDisputeInput {
  milestoneId: string;
  reason: DisputeReason;
  /** The acceptance line or piece complained of. */
  complaintAbout: string;
  pieceId: string | null;
  /** Minor units; what should go to the opener's side. */
  amountClaimed: number;
  text: string;
  fileIds: string[];
  commandId: string;
}

/** Evidence of one side, readable by the other; admins read it by their flag. */
export async function attachEvidence(
  tx: Tx,
  statementId: string,
  fileIds: readonly string[],
  owner: string,
  other: string,
): Promise<void> {
  for (const fileId of new Set(fileIds)) {
    await requireCleanFile(tx, fileId, { ownerCompanyId: owner, purpose: 'dispute-evidence' });
    await shareFile(tx, fileId, [other]);
    await tx.insert(disputeFile).values({ statementId, fileId });
  }
}

/**
 * Opens a dispute on a milestone whose money is held: nothing of it can be released or refunded until
 * the dispute has ended, and the clocks of the whole order stand still.
 */
export async function openDispute(
  db: Database,
  actor: Actor | null,
  input: OpenDisputeInput,
): Promise<{ disputeId: string }> {
  return transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'order.dispute', input.milestoneId);
    const by = actor as Actor;
    requireVerifiedEmail(by);
    const [again] = await tx.select().from(dispute).where(eq(dispute.commandId, input.commandId));
    if (again) return { disputeId: again.id };
    const side = sideOf(by, 'order.dispute', order);
    if (!side) throw new AppError('not-allowed');
    if (milestone.money !== 'held') {
      throw new AppError('state-conflict', {
        detail: 'A dispute stops held money. Nothing is held for this milestone any more.',
      });
    }
    if ((await openDisputesOf(tx, { milestoneId: milestone.id })).length > 0) {
      throw new AppError('already-exists', { detail: 'A dispute is open on this milestone already.' });
    }
    const held = await heldBalance(tx, milestone.id);
    if (!Number.isSafeInteger(input.amountClaimed) || input.amountClaimed < 1 || input.amountClaimed > held) {
      throw new AppError('invalid-input', {
        fields: {
          amountClaimed: `Enter an amount above zero and up to what is held, ${formatMoney({ amount: held, currency: order.currency })}.`,
        },
      });
    }
    if (input.pieceId && !(await piecesOf(tx, order.id)).some((row) => row.id === input.pieceId)) {
      throw new AppError('invalid-input', { fields: { pieceId: 'Choose a piece of this order.' } });
    }
    const now = await businessNow(tx);
    const disputeId = newId();
    const answerDueAt = now + order.terms.disputeAnswerDays * dayMs;
    await tx.insert(dispute).values({
      id: disputeId,
      orderId: order.id,
      milestoneId: milestone.id,
      state: 'open',
      reason: input.reason,
      complaintAbout: input.complaintAbout,
      pieceId: input.pieceId,
      amountClaimed: input.amountClaimed,
      text: input.text,
      openedBy: by.userId,
      openedByCompanyId: companyOf(order, side),
      openedAt: now,
      answerDueAt,
      decisionDueAt: answerDueAt + order.terms.disputeDecisionDays * dayMs,
      commandId: input.commandId,
    });
    const statementId = newId();
    await tx.insert(disputeStatement).values({
      id: statementId,
      disputeId,
      kind: 'opening',
      authorUserId: by.userId,
      authorCompanyId: companyOf(order, side),
      text: input.text,
      at: now,
      commandId: input.commandId,
    });
    const other = side === 'buyer' ? 'fabricator' : 'buyer';
    await attachEvidence(tx, statementId, input.fileIds, companyOf(order, side), companyOf(order, other));
    await audit(tx, by, {
      action: 'dispute.open',
      subjectType: 'dispute',
      subjectId: disputeId,
      companyId: companyOf(order, side),
      detail: { milestone: milestone.id, claimed: input.amountClaimed },
    });
    await stopClocks(tx, by, order.id);
    const answer = `Please answer by ${formatInstant(answerDueAt, order.buyerZone)}; otherwise the platform decides without your answer.`;
    await tell(tx, order, {
      kind: 'dispute-opened',
      by,
      side,
      milestoneId: milestone.id,
      text: `A dispute was opened on the ${milestoneKindText[milestone.kind].toLowerCase()} milestone: ${disputeReasonText[input.reason].toLowerCase()}.`,
      subject: `dispute on ${milestoneKindText[milestone.kind].toLowerCase()}`,
      paragraphs: [
        'The money stays held, and all clocks of the order stand still until the dispute has ended.',
      ],
      facts: [
        ['Complaint about', input.complaintAbout],
        ['Claimed', formatMoney({ amount: input.amountClaimed, currency: order.currency })],
      ],
      onlyBuyer: side === 'fabricator' ? [answer] : [],
      onlyFabricator: side === 'buyer' ? [answer] : [],
      action: 'Open the dispute',
      anchor: 'dispute',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
    return { disputeId };
  });
}
