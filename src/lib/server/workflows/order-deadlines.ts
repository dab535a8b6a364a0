import { and, asc, eq, inArray, lte } from 'drizzle-orm';
import { dayMs, formatDeadline, formatInstant, hourMs } from '../../domain/dates.ts';
import { liveOrderStates } from '../../domain/order-states.ts';
import type { Role } from '../../domain/roles.ts';
import type { Wait, WaitKind } from '../../domain/waits.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { coilOrder, deadlineNotice, shipment } from '../db/schema/orders.ts';
import { finaliseDecision } from '../disputes/index.ts';
import { releaseByWindow } from '../money/index.ts';
import {
  markReceived,
  orderNumberText,
  orderWaits,
  tell,
  unsafeMilestone,
  unsafeOrder,
  type OrderRow,
} from '../orders/index.ts';
import { notify } from '../outbox/index.ts';

/** Notes that a reminder or consequence was given; false when it was given before. */
async function once(tx: Tx, key: string, orderId: string, at: number): Promise<boolean> {
  const [made] = await tx
    .insert(deadlineNotice)
    .values({ key, orderId, at })
    .onConflictDoNothing()
    .returning({ key: deadlineNotice.key });
  return made !== undefined;
}

const keyOf = (wait: Wait) => `${wait.kind}/${wait.subjectId}/${wait.dueAt ?? 0}`;

/** Which roles of the owner's company a wait concerns. */
const rolesFor: Record<WaitKind, readonly Role[]> = {
  acknowledge: ['estimator'],
  fund: ['purchaser'],
  'fund-end': ['purchaser'],
  'drawing-submit': ['builder'],
  'drawing-answer': ['engineer'],
  'drawing-end': ['engineer', 'purchaser'],
  'build-submit': ['builder'],
  'build-end': ['builder', 'estimator'],
  'miss-answer': ['engineer'],
  ship: ['builder'],
  receipt: ['technician', 'engineer'],
  'receipt-proof': ['technician', 'engineer', 'purchaser'],
  window: ['engineer', 'purchaser'],
  release: ['purchaser'],
  'dispute-answer': ['purchaser', 'estimator'],
  'dispute-decision': [],
  appeal: ['purchaser', 'estimator'],
  'appeal-decision': [],
};

async function tellAdmins(tx: Tx, order: OrderRow, wait: Wait): Promise<void> {
  const admins = await tx
    .select({ userId: user.id, email: user.email })
    .from(user)
    .where(eq(user.isAdmin, true));
  await notify(tx, admins, {
    kind: 'dispute-decision-due',
    subject: `${orderNumberText(order)}: ${wait.what.toLowerCase()}`,
    content: {
      heading: wait.what,
      paragraphs: [`The dispute on order ${orderNumberText(order)} waits for the platform.`],
      action: { label: 'Open the disputes', path: `/admin/disputes/${wait.subjectId}` },
    },
    about: { type: 'order', id: order.id },
    href: `/admin/disputes/${wait.subjectId}`,
    dedupeKey: `admin/${keyOf(wait)}`,
  });
}

async function remind(tx: Tx, order: OrderRow, wait: Wait, dueAt: number, now: number): Promise<void> {
  const days = [...order.terms.remindBeforeDays].sort((a, b) => a - b);
  // After a jump of the clock only the nearest reminder makes sense; the earlier ones count as given.
  const reached = days.filter((d) => dueAt - d * dayMs <= now && dueAt - d * dayMs > wait.since);
  const nearest = reached[0];
  if (nearest === undefined) return;
  const fresh = await once(tx, `${keyOf(wait)}/remind-${nearest}`, order.id, now);
  for (const d of reached.slice(1)) await once(tx, `${keyOf(wait)}/remind-${d}`, order.id, now);
  if (!fresh || wait.owner === 'platform') return;
  const roles = rolesFor[wait.kind];
  await tell(tx, order, {
    kind: 'deadline-reminder',
    by: 'system',
    side: null,
    milestoneId: wait.milestoneId,
    text: `Reminder: ${wait.what} by ${formatDeadline(dueAt, order.buyerZone)}.`,
    subject: `${wait.what.toLowerCase()} by ${formatInstant(dueAt - 1, order.buyerZone, false)}`,
    paragraphs: [`Otherwise: ${wait.otherwise}`],
    action: 'Open the order',
    anchor: wait.anchor,
    buyer: wait.owner === 'buyer' ? roles : null,
    fabricator: wait.owner === 'fabricator' ? roles : null,
  });
}

async function tellOver(tx: Tx, order: OrderRow, wait: Wait): Promise<void> {
  await tell(tx, order, {
    kind: 'deadline-over',
    by: 'system',
    side: null,
    milestoneId: wait.milestoneId,
    text: `Not done in time: ${wait.what.charAt(0).toLowerCase()}${wait.what.slice(1)}. ${wait.otherwise}`,
    subject: `not in time: ${wait.what.toLowerCase()}`,
    action: 'Open the order',
    anchor: wait.anchor,
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
}

/** What happens when a wait is over. Returns when to look again, if it could not be done yet. */
async function over(tx: Tx, order: OrderRow, wait: Wait, now: number): Promise<number | null> {
  switch (wait.kind) {
    case 'window':
    case 'release': {
      const row = await unsafeMilestone(tx, wait.subjectId);
      if (await once(tx, `${keyOf(wait)}/over`, order.id, now)) {
        await tell(tx, order, {
          kind: 'window-ended',
          by: 'system',
          side: null,
          milestoneId: row.id,
          text: 'The inspection window has ended without a return or a dispute; the money is released.',
          subject: 'inspection window ended',
          action: 'Open the milestone',
          anchor: wait.anchor,
          buyer: ['purchaser', 'engineer'],
          fabricator: ['estimator', 'builder'],
        });
      }
      return (await releaseByWindow(tx, order, row)) ? null : now + hourMs;
    }
    case 'receipt-proof': {
      const [row] = await tx.select().from(shipment).where(eq(shipment.id, wait.subjectId));
      if (row && row.receivedAt === null) await markReceived(tx, 'system', order, row, '');
      return null;
    }
    case 'appeal':
      await finaliseDecision(tx, wait.subjectId);
      return null;
    case 'dispute-answer':
    case 'dispute-decision':
      if (await once(tx, `${keyOf(wait)}/over`, order.id, now)) {
        if (wait.kind === 'dispute-answer') await tellOver(tx, order, wait);
        await tellAdmins(tx, order, wait);
      }
      return null;
    default:
      if (await once(tx, `${keyOf(wait)}/over`, order.id, now)) await tellOver(tx, order, wait);
      return null;
  }
}

/** The next instant after now at which a wait has something to say. */
function nextInstant(order: OrderRow, waits: readonly Wait[], now: number): number {
  const instants = waits.flatMap((wait) =>
    wait.dueAt === null
      ? []
      : [wait.dueAt, ...order.terms.remindBeforeDays.map((d) => (wait.dueAt ?? 0) - d * dayMs)],
  );
  return Math.min(now + 30 * dayMs, ...instants.filter((at) => at > now));
}

/** Reminds, lets happen what was announced, and notes when to look again; one order, one transaction. */
export async function checkOrder(db: Database, orderId: string): Promise<void> {
  await transact(db, async (tx) => {
    const now = await businessNow(tx);
    const order = await unsafeOrder(tx, orderId);
    if (order.nextCheckAt > now) return;
    let again: number | null = null;
    let acted = false;
    for (const wait of await orderWaits(tx, order)) {
      if (wait.dueAt === null) continue;
      if (wait.dueAt > now) {
        await remind(tx, order, wait, wait.dueAt, now);
        continue;
      }
      const later = await over(tx, order, wait, now);
      if (later === null) acted = true;
      else again = Math.min(again ?? later, later);
      // One consequence may change the others: look at them afresh in the next run.
      if (['window', 'release', 'receipt-proof', 'appeal'].includes(wait.kind)) break;
    }
    const waits = await orderWaits(tx, await unsafeOrder(tx, orderId));
    const overdue = waits.some(
      (wait) =>
        wait.dueAt !== null &&
        wait.dueAt <= now &&
        ['window', 'release', 'receipt-proof', 'appeal'].includes(wait.kind),
    );
    const next = acted && overdue ? now : Math.min(again ?? Infinity, nextInstant(order, waits, now));
    await tx.update(coilOrder).set({ nextCheckAt: next }).where(eq(coilOrder.id, orderId));
  });
}

/** Every order whose deadlines have to be looked at; run again and again on the business clock. */
export async function runOrderDeadlines(db: Database, signal: AbortSignal): Promise<void> {
  for (let round = 0; round < 50; round += 1) {
    const now = await businessNow(db);
    const due = await db
      .select({ id: coilOrder.id })
      .from(coilOrder)
      .where(and(inArray(coilOrder.state, [...liveOrderStates]), lte(coilOrder.nextCheckAt, now)))
      .orderBy(asc(coilOrder.nextCheckAt))
      .limit(100);
    for (const { id } of due) {
      if (signal.aborted) return;
      await checkOrder(db, id);
    }
    if (due.length < 100) return;
  }
}
