import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dayMs, formatInstant } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { disputeDecision, disputeStatement } from '../db/schema/disputes.ts';
import { tell } from '../orders/index.ts';
import { moveDispute } from './move.ts';
import { carryOut, milestoneName, splitText } from './outcome.ts';
import { caseFor, decisionsOf, unsafeDispute, type DisputeCase } from './queries.ts';
import { requireWhole } from './settle.ts';

export interface DecideInput {
  disputeId: string;
  /** Minor units; together exactly what is held. */
  release: number;
  refund: number;
  /** What becomes of the goods and of the other milestones. */
  goods: string;
  otherMilestones: string;
  freightPaidBy: 'buyer' | 'fabricator' | 'none';
  reason: string;
  version?: number;
}

const shortestReason = 30;

async function writeDecision(tx: Tx, admin: Actor, input: DecideInput, instance: 1 | 2): Promise<void> {
  const fields: Record<string, string> = {};
  if (input.reason.trim().length < shortestReason) {
    fields['reason'] =
      `Give the reason in writing (${shortestReason} characters or more); both sides read it.`;
  }
  if (!input.goods.trim()) fields['goods'] = 'Say what becomes of the goods.';
  if (Object.keys(fields).length > 0) throw new AppError('invalid-input', { fields });
  await tx.insert(disputeDecision).values({
    id: newId(),
    disputeId: input.disputeId,
    instance,
    releaseAmount: input.release,
    refundAmount: input.refund,
    goods: input.goods.trim(),
    otherMilestones: input.otherMilestones.trim(),
    freightPaidBy: input.freightPaidBy,
    reason: input.reason.trim(),
    decidedBy: admin.userId,
    at: await businessNow(tx),
  });
}

async function tellDecision(
  tx: Tx,
  found: DisputeCase,
  input: DecideInput,
  admin: Actor,
  until: number | null,
) {
  await tell(tx, found.order, {
    kind: until === null ? 'appeal-decided' : 'dispute-decided',
    by: admin,
    side: null,
    milestoneId: found.milestone.id,
    text: `The platform has decided the ${until === null ? 'appeal' : 'dispute'} on the ${milestoneName(found)} milestone: ${splitText(found, input)}.`,
    subject: until === null ? 'appeal decided' : 'dispute decided',
    paragraphs: [
      input.reason.trim(),
      until === null
        ? 'This decision is final; the money moves now.'
        : `Either side may appeal until ${formatInstant(until, found.order.buyerZone)}. The money stays held until then.`,
    ],
    facts: [
      ['Goods', input.goods.trim()],
      ...(input.otherMilestones.trim()
        ? ([['Other milestones', input.otherMilestones.trim()]] as [string, string][])
        : []),
      [
        'Freight',
        { buyer: 'paid by the buyer', fabricator: 'paid by the fabricator', none: 'none' }[
          input.freightPaidBy
        ],
      ],
    ],
    action: 'Read the decision',
    anchor: 'dispute',
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
}

/**
 * An admin decides: release x and refund y of what is held, with a written reason. Before the answer is
 * due, only an answered dispute can be decided. The money moves when the days of appeal are over.
 */
export async function decideDispute(db: Database, actor: Actor | null, input: DecideInput): Promise<void> {
  requireAccess(actor, 'admin.decide-dispute');
  await transact(db, async (tx) => {
    const found = await unsafeDispute(tx, input.disputeId);
    const now = await businessNow(tx);
    if (found.dispute.state === 'open' && now < found.dispute.answerDueAt) {
      throw new AppError('state-conflict', { detail: 'The other side may still answer.' });
    }
    await requireWhole(tx, found, input);
    const until = now + found.order.terms.appealDays * dayMs;
    await moveDispute(
      tx,
      actor,
      found.dispute,
      'decide',
      { appealUntil: until, releaseAmount: input.release, refundAmount: input.refund },
      input.version,
    );
    await writeDecision(tx, actor, input, 1);
    await tellDecision(tx, found, input, actor, until);
  });
}

/** A side appeals within the days it has, to an admin who did not decide. */
export async function appealDispute(
  db: Database,
  actor: Actor | null,
  input: { disputeId: string; text: string; commandId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const found = await caseFor(tx, actor, 'order.dispute', input.disputeId);
    const { dispute, order, side, by } = found;
    requireVerifiedEmail(by);
    const [again] = await tx
      .select({ id: disputeStatement.id })
      .from(disputeStatement)
      .where(eq(disputeStatement.commandId, input.commandId));
    if (again) return;
    const text = input.text.trim();
    if (!text)
      throw new AppError('invalid-input', { fields: { text: 'Say what is wrong with the decision.' } });
    const now = await businessNow(tx);
    if (dispute.state === 'decided' && dispute.appealUntil !== null && now > dispute.appealUntil) {
      throw new AppError('state-conflict', { detail: 'The days of appeal are over.' });
    }
    await moveDispute(tx, by, dispute, 'appeal');
    await tx.insert(disputeStatement).values({
      id: newId(),
      disputeId: dispute.id,
      kind: 'appeal',
      authorUserId: by.userId,
      authorCompanyId: found.companyId,
      text,
      at: now,
      commandId: input.commandId,
    });
    await tell(tx, order, {
      kind: 'dispute-appealed',
      by,
      side,
      milestoneId: dispute.milestoneId,
      text: `The decision on the ${milestoneName(found)} milestone was appealed. A second admin decides; the money stays held.`,
      subject: 'appeal against the decision',
      action: 'Open the dispute',
      anchor: 'dispute',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
  });
}

/** A second admin decides the appeal; it is final and the money moves at once. */
export async function decideAppeal(db: Database, actor: Actor | null, input: DecideInput): Promise<void> {
  requireAccess(actor, 'admin.decide-dispute');
  await transact(db, async (tx) => {
    const found = await unsafeDispute(tx, input.disputeId);
    const first = (await decisionsOf(tx, input.disputeId)).find((row) => row.instance === 1);
    if (first?.decidedBy === actor.userId) {
      throw new AppError('not-allowed', { detail: 'An appeal is decided by another admin.' });
    }
    await requireWhole(tx, found, input);
    await moveDispute(
      tx,
      actor,
      found.dispute,
      'decide-appeal',
      {
        releaseAmount: input.release,
        refundAmount: input.refund,
        closedAt: await businessNow(tx),
      },
      input.version,
    );
    await writeDecision(tx, actor, input, 2);
    await tellDecision(tx, found, input, actor, null);
    await carryOut(tx, actor, found, input);
  });
}

/** The days of appeal are over: the decision is final and the money moves. Run by the deadlines. */
export async function finaliseDecision(tx: Tx, disputeId: string): Promise<void> {
  const found = await unsafeDispute(tx, disputeId);
  const { dispute, order } = found;
  const now = await businessNow(tx);
  if (dispute.state !== 'decided' || dispute.appealUntil === null || dispute.appealUntil > now) return;
  const split = { release: dispute.releaseAmount ?? 0, refund: dispute.refundAmount ?? 0 };
  await moveDispute(tx, 'system', dispute, 'become-final', { closedAt: now });
  await tell(tx, order, {
    kind: 'dispute-final',
    by: 'system',
    side: null,
    milestoneId: dispute.milestoneId,
    text: `The decision on the ${milestoneName(found)} milestone is final: ${splitText(found, split)}. The money moves now.`,
    subject: 'decision final',
    action: 'Open the dispute',
    anchor: 'dispute',
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
  await carryOut(tx, 'system', found, split);
}
