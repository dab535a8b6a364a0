import { eq, sql } from 'drizzle-orm';
import { addDays, dateIn, dayMs, endOfDate } from '../../domain/dates.ts';
import { businessNow } from '../adapters/clock.ts';
import { audit, type By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { coilOrder, milestone } from '../db/schema/orders.ts';
import { milestonesOf, openDisputesOf, unsafeOrder } from './queries.ts';

/** A dispute stops the clocks of the whole order. */
export async function stopClocks(tx: Tx, by: By, orderId: string): Promise<void> {
  const order = await unsafeOrder(tx, orderId);
  if (order.clockStoppedAt !== null) return;
  await tx
    .update(coilOrder)
    .set({ clockStoppedAt: await businessNow(tx), nextCheckAt: 0, version: sql`${coilOrder.version} + 1` })
    .where(eq(coilOrder.id, orderId));
  await audit(tx, by, { action: 'order.stop-clocks', subjectType: 'order', subjectId: orderId });
}

/**
 * Lets the clocks run again once no dispute is open. Windows, funding waits and due dates move by the
 * time they stood still; a window still ends at 24:00 in the buyer's zone.
 */
export async function resumeClocks(tx: Tx, by: By, orderId: string): Promise<void> {
  const order = await unsafeOrder(tx, orderId);
  if (order.clockStoppedAt === null || (await openDisputesOf(tx, { orderId })).length > 0) return;
  const now = await businessNow(tx);
  const stopped = now - order.clockStoppedAt;
  const days = Math.ceil(stopped / dayMs);
  const moved = (date: string | null) => (date === null ? null : addDays(date, days));
  for (const row of await milestonesOf(tx, orderId)) {
    const running = row.windowEndsAt !== null && row.money === 'held';
    await tx
      .update(milestone)
      .set({
        dueDate: moved(row.dueDate),
        fundingAskedAt:
          row.fundingAskedAt !== null && row.money === 'unfunded'
            ? row.fundingAskedAt + stopped
            : row.fundingAskedAt,
        windowEndsAt:
          running && row.windowEndsAt !== null
            ? endOfDate(order.buyerZone, dateIn(order.buyerZone, row.windowEndsAt - 1 + stopped))
            : row.windowEndsAt,
      })
      .where(eq(milestone.id, row.id));
  }
  await tx
    .update(coilOrder)
    .set({
      clockStoppedAt: null,
      clockResumedAt: now,
      dueDate: moved(order.dueDate),
      nextCheckAt: 0,
      version: sql`${coilOrder.version} + 1`,
    })
    .where(eq(coilOrder.id, orderId));
  await audit(tx, by, {
    action: 'order.resume-clocks',
    subjectType: 'order',
    subjectId: orderId,
    detail: { stopped },
  });
}

/** Has the deadlines of an order looked at in the next run. */
export async function lookAgain(tx: Tx, orderId: string): Promise<void> {
  await tx.update(coilOrder).set({ nextCheckAt: 0 }).where(eq(coilOrder.id, orderId));
}
