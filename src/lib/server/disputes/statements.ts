import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates } from '../../domain/dispute-states.ts';
import { AppError } from '../../domain/errors.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { transact, type Database } from '../db/index.ts';
import { disputeStatement } from '../db/schema/disputes.ts';
import { companyOf, resumeClocks, tell } from '../orders/index.ts';
import { moveDispute } from './move.ts';
import { attachEvidence } from './open-dispute.ts';
import { overtakeOffers, milestoneName } from './outcome.ts';
import { caseFor } from './queries.ts';

export interface StatementInput {
  disputeId: string;
  text: string;
  fileIds: string[];
  commandId: string;
}

/**
 * Adds a statement with evidence. The first one of the side complained of is its answer; after it the
 * platform's days to decide begin to count for the page.
 */
export async function addStatement(db: Database, actor: Actor | null, input: StatementInput): Promise<void> {
  await transact(db, async (tx) => {
    const found = await caseFor(tx, actor, 'order.dispute', input.disputeId);
    const { dispute, order, side, by } = found;
    const [again] = await tx
      .select({ id: disputeStatement.id })
      .from(disputeStatement)
      .where(eq(disputeStatement.commandId, input.commandId));
    if (again) return;
    if (!openDisputeStates.includes(dispute.state)) {
      throw new AppError('state-conflict', { detail: 'This dispute has ended.' });
    }
    const text = input.text.trim();
    if (!text) throw new AppError('invalid-input', { fields: { text: 'Write your statement.' } });
    const answers = dispute.state === 'open' && side !== found.opener;
    const statementId = newId();
    await tx.insert(disputeStatement).values({
      id: statementId,
      disputeId: dispute.id,
      kind: answers ? 'answer' : 'statement',
      authorUserId: by.userId,
      authorCompanyId: found.companyId,
      text,
      at: await businessNow(tx),
      commandId: input.commandId,
    });
    const other = side === 'buyer' ? 'fabricator' : 'buyer';
    await attachEvidence(tx, statementId, input.fileIds, found.companyId, companyOf(order, other));
    if (answers) await moveDispute(tx, by, dispute, 'answer');
    await tell(tx, order, {
      kind: 'dispute-statement',
      by,
      side,
      milestoneId: dispute.milestoneId,
      text: answers
        ? `The dispute on the ${milestoneName(found)} milestone was answered.`
        : `A statement was added to the dispute on the ${milestoneName(found)} milestone.`,
      subject: answers ? 'dispute answered' : 'statement added to the dispute',
      action: 'Open the dispute',
      anchor: 'dispute',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
  });
}

/** The side that opened a dispute takes it back; the money stays held and the clocks run again. */
export async function withdrawDispute(
  db: Database,
  actor: Actor | null,
  input: { disputeId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const found = await caseFor(tx, actor, 'order.dispute', input.disputeId);
    const { dispute, order, side, by } = found;
    if (side !== found.opener) {
      throw new AppError('not-allowed', {
        detail: 'Only the side that opened the dispute can take it back.',
      });
    }
    await moveDispute(tx, by, dispute, 'withdraw', { closedAt: await businessNow(tx) });
    await overtakeOffers(tx, dispute.id);
    await tell(tx, order, {
      kind: 'dispute-withdrawn',
      by,
      side,
      milestoneId: dispute.milestoneId,
      text: `The dispute on the ${milestoneName(found)} milestone was withdrawn. The money stays held.`,
      subject: 'dispute withdrawn',
      action: 'Open the order',
      anchor: `milestone-${dispute.milestoneId}`,
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
    await resumeClocks(tx, by, order.id);
  });
}
