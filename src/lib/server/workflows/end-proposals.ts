import { and, asc, eq, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import { formatMoney } from '../../domain/money.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { endProposal } from '../db/schema/orders.ts';
import { heldBalance } from '../money/index.ts';
import {
  companyOf,
  milestonesOf,
  openDisputesOf,
  orderFor,
  requireNoDispute,
  sideOf,
  tell,
  type OrderRow,
  type Side,
} from '../orders/index.ts';
import { endOrder, type EndPart } from './end-order.ts';

export type EndProposalRow = typeof endProposal.$inferSelect;

export async function endProposalsOf(reader: Reader, orderId: string): Promise<EndProposalRow[]> {
  return reader
    .select()
    .from(endProposal)
    .where(eq(endProposal.orderId, orderId))
    .orderBy(asc(endProposal.proposedAt), asc(endProposal.id));
}

async function party(
  tx: Tx,
  actor: Actor | null,
  orderId: string,
): Promise<{ order: OrderRow; by: Actor; side: Side }> {
  const order = await orderFor(tx, actor, 'order.end', orderId);
  const by = actor as Actor;
  requireVerifiedEmail(by);
  const side = sideOf(by, 'order.end', order);
  if (!side) throw new AppError('not-allowed');
  return { order, by, side };
}

/** Checks a proposal against what is held now: each held milestone once, each split whole. */
async function requireWholeParts(tx: Tx, order: OrderRow, parts: readonly EndPart[]): Promise<void> {
  const fields: Record<string, string> = {};
  const rows = await milestonesOf(tx, order.id);
  for (const row of rows) {
    if (['releasing', 'refunding', 'splitting'].includes(row.money)) {
      throw new AppError('state-conflict', {
        detail: 'Money of this order is on its way; please wait until it has arrived.',
      });
    }
    const given = parts.filter((part) => part.milestoneId === row.id);
    if (row.money !== 'held') continue;
    const held = await heldBalance(tx, row.id);
    const part = given[0];
    const whole =
      given.length === 1 &&
      part !== undefined &&
      [part.release, part.refund].every((value) => Number.isSafeInteger(value) && value >= 0) &&
      part.release + part.refund === held;
    if (!whole) {
      fields[`release-${row.id}`] =
        `${milestoneKindText[row.kind]}: release and refund have to make ${formatMoney({ amount: held, currency: order.currency })}.`;
    }
  }
  if (Object.keys(fields).length > 0) throw new AppError('invalid-input', { fields });
}

export interface ProposeEndInput {
  orderId: string;
  parts: EndPart[];
  workInHand: string;
  reason: string;
  commandId: string;
}

/** Proposes to end the order by agreement; while the other side's proposal is open, this one counters it. */
export async function proposeEnd(
  db: Database,
  actor: Actor | null,
  input: ProposeEndInput,
): Promise<{ proposalId: string }> {
  return transact(db, async (tx) => {
    const { order, by, side } = await party(tx, actor, input.orderId);
    const [again] = await tx.select().from(endProposal).where(eq(endProposal.commandId, input.commandId));
    if (again) return { proposalId: again.id };
    if (order.state === 'done' || order.state === 'ended') {
      throw new AppError('state-conflict', { detail: 'The order is closed.' });
    }
    requireNoDispute(await openDisputesOf(tx, { orderId: order.id }));
    if (!input.reason.trim()) throw new AppError('invalid-input', { fields: { reason: 'Say why.' } });
    await requireWholeParts(tx, order, input.parts);
    const companyId = companyOf(order, side);
    const [open] = await tx
      .select()
      .from(endProposal)
      .where(and(eq(endProposal.orderId, order.id), eq(endProposal.state, 'open')));
    if (open) {
      await tx
        .update(endProposal)
        .set({
          state: open.companyId === companyId ? 'withdrawn' : 'countered',
          decidedBy: by.userId,
          decidedAt: await businessNow(tx),
          version: sql`${endProposal.version} + 1`,
        })
        .where(eq(endProposal.id, open.id));
    }
    const proposalId = newId();
    await tx.insert(endProposal).values({
      id: proposalId,
      orderId: order.id,
      companyId,
      proposedBy: by.userId,
      proposedAt: await businessNow(tx),
      parts: input.parts.map(({ milestoneId, release, refund }) => ({ milestoneId, release, refund })),
      workInHand: input.workInHand.trim(),
      reason: input.reason.trim(),
      state: 'open',
      commandId: input.commandId,
    });
    await audit(tx, by, { action: 'end.propose', subjectType: 'order', subjectId: order.id, companyId });
    await tell(tx, order, {
      kind: 'end-proposed',
      by,
      side,
      text: `${side === 'buyer' ? order.buyerName : order.fabricatorName} proposes to end the order.`,
      subject:
        open && open.companyId !== companyId
          ? 'counter-proposal to end the order'
          : 'end of the order proposed',
      paragraphs: [input.reason.trim()],
      facts: input.workInHand.trim() ? [['Work in hand', input.workInHand.trim()]] : [],
      action: 'Look at the proposal',
      anchor: 'end',
      buyer: ['purchaser'],
      fabricator: ['estimator'],
    });
    return { proposalId };
  });
}

/** The other side accepts or declines; the proposer may withdraw. Accepting ends the order. */
export async function answerEnd(
  db: Database,
  actor: Actor | null,
  input: { proposalId: string; answer: 'accept' | 'decline' | 'withdraw' },
): Promise<void> {
  await transact(db, async (tx) => {
    const [proposal] = await tx.select().from(endProposal).where(eq(endProposal.id, input.proposalId));
    if (!proposal) throw new AppError('not-found');
    const { order, by, side } = await party(tx, actor, proposal.orderId);
    const own = companyOf(order, side) === proposal.companyId;
    if (own !== (input.answer === 'withdraw')) {
      throw new AppError('not-allowed', {
        detail: own
          ? 'The other side has to answer your proposal.'
          : 'Only the side that proposed can take it back.',
      });
    }
    const state = { accept: 'accepted', decline: 'declined', withdraw: 'withdrawn' } as const;
    const result = await tx
      .update(endProposal)
      .set({
        state: state[input.answer],
        decidedBy: by.userId,
        decidedAt: await businessNow(tx),
        version: sql`${endProposal.version} + 1`,
      })
      .where(and(eq(endProposal.id, proposal.id), eq(endProposal.state, 'open')));
    if (result.rowsAffected !== 1) {
      throw new AppError('state-conflict', { detail: 'This proposal is no longer open.' });
    }
    if (input.answer === 'accept') {
      await requireWholeParts(tx, order, proposal.parts);
      await endOrder(tx, by, order, {
        parts: proposal.parts,
        reason: `Both agreed. ${proposal.reason}`,
        side,
        kind: 'end-agreed',
      });
      return;
    }
    await tell(tx, order, {
      kind: `end-${state[input.answer]}`,
      by,
      side,
      text: `The proposal to end the order was ${state[input.answer]}.`,
      subject: `proposal to end ${state[input.answer]}`,
      action: 'Open the order',
      anchor: 'end',
      buyer: ['purchaser'],
      fabricator: ['estimator'],
    });
  });
}
