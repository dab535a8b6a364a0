import { and, eq, isNull } from 'drizzle-orm';
import { addDays, addWorkingDays, dateIn, endOfDate } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { formatMoney } from '../../domain/money.ts';
import {
  milestoneKindText,
  moneyMachine,
  workMachine,
  type AttentionReason,
  type MoneyState,
} from '../../domain/milestone-states.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { coilOrder, milestone } from '../db/schema/orders.ts';
import { transition } from '../db/transition.ts';
import { milestonesOf, unsafeMilestone, unsafeOrder, type MilestoneRow, type OrderRow } from './queries.ts';
import { tell } from './tell.ts';

export type WorkEvent = (typeof workMachine)['transitions'][number]['event'];
export type MoneyEvent = (typeof moneyMachine)['transitions'][number]['event'];
type MilestoneSet = Partial<typeof milestone.$inferInsert>;

/** Moves the work column of a milestone. */
export async function moveWork(
  tx: Tx,
  by: By,
  row: MilestoneRow,
  event: WorkEvent,
  set: MilestoneSet = {},
  expectedVersion?: number,
): Promise<void> {
  await transition(tx, {
    machine: workMachine,
    table: milestone,
    column: milestone.work,
    columnName: 'work',
    id: row.id,
    from: row.work,
    event,
    by,
    set,
    ...(expectedVersion === undefined ? {} : { expectedVersion }),
  });
}

/** Moves the money column of a milestone; only the money module calls this. */
export async function moveMoney(
  tx: Tx,
  by: By,
  row: Pick<MilestoneRow, 'id' | 'money'>,
  event: MoneyEvent,
  set: MilestoneSet = {},
): Promise<MoneyState> {
  return transition(tx, {
    machine: moneyMachine,
    table: milestone,
    column: milestone.money,
    columnName: 'money',
    id: row.id,
    from: row.money,
    event,
    by,
    set,
  });
}

/** Notes why money in flight needs a look, or that it no longer does. */
export async function setAttention(
  tx: Tx,
  milestoneId: string,
  attention: AttentionReason | null,
): Promise<void> {
  await tx.update(milestone).set({ attention }).where(eq(milestone.id, milestoneId));
}

/** End of the inspection window that begins now: 24:00 in the buyer's zone, `inspectionDays` from today. */
export function windowEnd(order: Pick<OrderRow, 'buyerZone' | 'inspectionDays'>, now: number): number {
  return endOfDate(order.buyerZone, addDays(dateIn(order.buyerZone, now), order.inspectionDays));
}

function isClosed(row: MilestoneRow): boolean {
  return row.work === 'accepted' || row.work === 'cancelled';
}

/**
 * Opens the work of every milestone that can start: its money is held, the order runs and all earlier
 * ones are accepted. Sets the due date when the build opens (the later of drawing approval and funding),
 * and from when the next milestone waits for its funding.
 */
export async function openWhatCanStart(tx: Tx, by: By, orderId: string): Promise<void> {
  const order = await unsafeOrder(tx, orderId);
  if (order.state !== 'running') return;
  const now = await businessNow(tx);
  const rows = await milestonesOf(tx, orderId);
  for (const row of rows) {
    if (isClosed(row)) continue;
    if (row.money === 'unfunded' || row.money === 'paying') {
      if (row.fundingAskedAt === null) await askForFunding(tx, order, row, now);
    } else if (row.money === 'held' && row.work === 'planned') {
      const due =
        row.kind === 'build' ? addWorkingDays(dateIn(order.buyerZone, now), order.leadTimeWorkingDays) : null;
      await moveWork(tx, by, row, 'open', { openedAt: now, ...(due ? { dueDate: due } : {}) });
      if (due) await setDueDate(tx, order, due);
      await tellOpened(tx, order, row, due);
    }
    // Only the first that is not closed is under work.
    return;
  }
}

async function setDueDate(tx: Tx, order: OrderRow, due: string): Promise<void> {
  await tx.update(coilOrder).set({ dueDate: due }).where(eq(coilOrder.id, order.id));
  await tx
    .update(milestone)
    .set({ dueDate: due })
    .where(and(eq(milestone.orderId, order.id), eq(milestone.kind, 'delivery')));
}

async function askForFunding(tx: Tx, order: OrderRow, row: MilestoneRow, now: number): Promise<void> {
  await tx
    .update(milestone)
    .set({ fundingAskedAt: now })
    .where(and(eq(milestone.id, row.id), isNull(milestone.fundingAskedAt)));
  const name = milestoneKindText[row.kind].toLowerCase();
  await tell(tx, order, {
    kind: 'funding-asked',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `The ${name} milestone waits for its payment of ${formatMoney({ amount: row.amount, currency: order.currency })}.`,
    subject: `${milestoneKindText[row.kind]} to be funded`,
    paragraphs: [
      'The money is held by the platform until release. Work on a milestone starts once it is held.',
    ],
    action: 'Fund the milestone',
    anchor: `milestone-${row.id}`,
    buyer: ['purchaser'],
    fabricator: null,
  });
}

async function tellOpened(tx: Tx, order: OrderRow, row: MilestoneRow, due: string | null): Promise<void> {
  const name = milestoneKindText[row.kind].toLowerCase();
  await tell(tx, order, {
    kind: 'milestone-opened',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `Work on the ${name} milestone can start: its money is held by the platform.`,
    subject: `${milestoneKindText[row.kind]} can start`,
    ...(due ? { facts: [['Due', due]] as [string, string][] } : {}),
    action: 'Open the order',
    anchor: `milestone-${row.id}`,
    buyer: null,
    fabricator: ['builder', 'estimator'],
  });
}

/** Marks a milestone submitted and starts its inspection window. */
export async function markSubmitted(tx: Tx, by: By, order: OrderRow, row: MilestoneRow): Promise<number> {
  const now = await businessNow(tx);
  const windowEndsAt = windowEnd(order, now);
  await moveWork(tx, by, row, 'submit', { submittedAt: now, windowEndsAt });
  return windowEndsAt;
}

/** Accepts a submitted milestone; the next one may open. Its money moves only by release. */
export async function markAccepted(
  tx: Tx,
  by: By,
  row: MilestoneRow,
  expectedVersion?: number,
): Promise<void> {
  await moveWork(tx, by, row, 'accept', { acceptedAt: await businessNow(tx) }, expectedVersion);
  await openWhatCanStart(tx, by, row.orderId);
}

/** The milestone of a kind, which must be there. */
export async function milestoneOfKind(
  tx: Tx,
  orderId: string,
  kind: MilestoneRow['kind'],
): Promise<MilestoneRow> {
  const row = (await milestonesOf(tx, orderId)).find((m) => m.kind === kind);
  if (!row) throw new AppError('not-found');
  return row;
}

export { unsafeMilestone };
