import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { groundsFor, groundText, type Ground } from '../../domain/waits.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { endProposal } from '../db/schema/orders.ts';
import { closePaymentPage, heldBalance, moveHeldMoney } from '../money/index.ts';
import {
  closeRequest,
  milestonesOf,
  moveMoney,
  moveOrder,
  movePiece,
  moveWork,
  openDisputesOf,
  orderFor,
  orderWaits,
  piecesOf,
  requireNoDispute,
  sideOf,
  tell,
  unsafeMilestone,
  type MilestoneRow,
  type OrderRow,
  type Side,
} from '../orders/index.ts';

export interface EndPart {
  milestoneId: string;
  release: number;
  refund: number;
}

const acceptedWork = (row: MilestoneRow) => row.work === 'accepted';

/** Releases of held milestones by a rule; the rest is refunded. */
export async function partsBy(
  tx: Tx,
  orderId: string,
  releases: (row: MilestoneRow) => boolean,
): Promise<EndPart[]> {
  const parts: EndPart[] = [];
  for (const row of await milestonesOf(tx, orderId)) {
    if (row.money !== 'held') continue;
    const held = await heldBalance(tx, row.id);
    parts.push(
      releases(row)
        ? { milestoneId: row.id, release: held, refund: 0 }
        : { milestoneId: row.id, release: 0, refund: held },
    );
  }
  return parts;
}

async function closeMilestone(tx: Tx, by: By, order: OrderRow, row: MilestoneRow, part: EndPart | undefined) {
  if (row.money === 'paying') {
    await closePaymentPage(tx, row);
    await moveMoney(tx, by, row, 'payment-lapsed', { attention: null });
  }
  const openWork = row.work !== 'accepted' && row.work !== 'cancelled';
  if (openWork) await moveWork(tx, by, row, part && part.release > 0 ? 'conclude' : 'cancel');
  if (row.money === 'held') {
    if (!part) throw new AppError('invalid-input', { detail: 'Say what becomes of every held milestone.' });
    await moveHeldMoney(tx, by, order, await unsafeMilestone(tx, row.id), part);
  }
}

/**
 * Ends an order: held money moves as given, milestones without money are cancelled, payment pages are
 * closed, and the request ends or opens for another award when nothing was ever held.
 */
export async function endOrder(
  tx: Tx,
  by: By,
  order: OrderRow,
  input: { parts: readonly EndPart[]; reason: string; side: Side | null; kind: string },
): Promise<void> {
  requireNoDispute(await openDisputesOf(tx, { orderId: order.id }));
  const rows = await milestonesOf(tx, order.id);
  const neverStarted = rows.every((row) => row.heldAt === null);
  for (const row of rows) {
    await closeMilestone(
      tx,
      by,
      order,
      row,
      input.parts.find((part) => part.milestoneId === row.id),
    );
  }
  for (const row of await piecesOf(tx, order.id)) {
    if (['planned', 'measured', 'missed', 'accepted'].includes(row.state))
      await movePiece(tx, by, row, 'cancel');
  }
  await moveOrder(tx, by, order, 'end', { closedAt: await businessNow(tx), endReason: input.reason });
  await tx
    .update(endProposal)
    .set({ state: 'overtaken' })
    .where(and(eq(endProposal.orderId, order.id), eq(endProposal.state, 'open')));
  await closeRequest(tx, by, order.requestId, neverStarted ? 're-open' : 'end');
  await tell(tx, order, {
    kind: input.kind,
    by,
    side: input.side,
    text: `The order has ended. ${input.reason}`,
    subject: 'order ended',
    paragraphs: neverStarted
      ? ['Nothing had been paid. The request is open for another award.']
      : ['Held money goes out as agreed; both are told when it has arrived.'],
    action: 'Open the order',
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
}

/** The fabricator does not take the order on; the buyer may award another bid. */
export async function declineOrder(
  db: Database,
  actor: Actor | null,
  input: { orderId: string; reason: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.acknowledge', input.orderId);
    const by = actor as Actor;
    if (order.state !== 'to-acknowledge') {
      throw new AppError('state-conflict', {
        detail: 'The order is acknowledged already; it can be ended by agreement.',
      });
    }
    const reason = input.reason.trim();
    if (!reason) throw new AppError('invalid-input', { fields: { reason: 'Say why.' } });
    await endOrder(tx, by, order, {
      parts: [],
      reason: `${order.fabricatorName} does not take it on: ${reason}`,
      side: 'fabricator',
      kind: 'order-declined',
    });
  });
}

/**
 * One side ends the order because a wait is over: what it may do and what becomes of the money was
 * fixed at award.
 */
export async function endByRight(
  db: Database,
  actor: Actor | null,
  input: { orderId: string; ground: Ground },
): Promise<void> {
  await transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.end', input.orderId);
    const by = actor as Actor;
    requireVerifiedEmail(by);
    const side = sideOf(by, 'order.end', order);
    if (!side) throw new AppError('not-allowed');
    const grounds = groundsFor(await orderWaits(tx, order), side, await businessNow(tx));
    if (input.ground === 'may-suspend' || !grounds.includes(input.ground)) {
      throw new AppError('state-conflict', { detail: 'The time for this is not over yet.' });
    }
    await endOrder(tx, by, order, {
      parts: await partsBy(tx, order.id, releaseRule[input.ground]),
      reason: groundText[input.ground],
      side,
      kind: 'order-ended',
    });
  });
}

/** Which held milestones go to the fabricator when an order ends on a ground. */
const releaseRule: Record<Ground, (row: MilestoneRow) => boolean> = {
  'not-acknowledged': () => false,
  'not-funded': acceptedWork,
  'drawing-unanswered': (row) => row.kind === 'drawing' || acceptedWork(row),
  overdue: () => false,
  'may-suspend': () => false,
};

/** The fabricator stops work because the next milestone was not funded in time; funding lets it go on. */
export async function suspendOrder(
  db: Database,
  actor: Actor | null,
  input: { orderId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.acknowledge', input.orderId);
    const by = actor as Actor;
    const grounds = groundsFor(await orderWaits(tx, order), 'fabricator', await businessNow(tx));
    if (!grounds.includes('may-suspend')) {
      throw new AppError('state-conflict', { detail: 'The buyer still has time to fund the milestone.' });
    }
    await moveOrder(tx, by, order, 'suspend');
    await tell(tx, order, {
      kind: 'order-suspended',
      by,
      side: 'fabricator',
      text: 'The fabricator has suspended the order: the next milestone was not funded in time. It goes on once it is funded.',
      subject: 'order suspended',
      action: 'Open the order',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
  });
}
