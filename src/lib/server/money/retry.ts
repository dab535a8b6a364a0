import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { milestone } from '../db/schema/orders.ts';
import { setAttention, unsafeMilestone, unsafeOrder } from '../orders/index.ts';
import { refundPurpose, releasePurpose } from './close-money.ts';
import { isBooked } from './ledger.ts';
import { planRefund, planTransfer } from './move-held.ts';
import { latestOperation } from './operations.ts';

/**
 * An admin has money in flight tried again after it was refused or came back: a new operation with a new
 * key, only for the leg that has not landed.
 */
export async function retryMoney(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string },
): Promise<void> {
  requireAccess(actor, 'admin.operate');
  await transact(db, async (tx) => {
    const row = await unsafeMilestone(tx, input.milestoneId);
    const order = await unsafeOrder(tx, row.orderId);
    let planned = 0;
    if (row.money === 'releasing' || row.money === 'splitting') {
      const op = await latestOperation(tx, releasePurpose(row.id));
      if (op?.state === 'failed' && !(await isBooked(tx, releasePurpose(row.id)))) {
        await planTransfer(tx, order, row, row.releaseAmount);
        planned += 1;
      }
    }
    if (row.money === 'refunding' || row.money === 'splitting') {
      const op = await latestOperation(tx, refundPurpose(row.id));
      const cameBack =
        op?.state === 'known' && ['failed', 'canceled'].includes(String(op.result?.['status']));
      if (op?.state === 'failed' || cameBack) {
        await planRefund(tx, order, row, row.refundAmount);
        planned += 1;
      }
    }
    if (planned === 0) {
      throw new AppError('state-conflict', { detail: 'Nothing of this milestone waits for a new try.' });
    }
    await setAttention(tx, row.id, null);
    await audit(tx, actor, { action: 'money.retry', subjectType: 'milestone', subjectId: row.id });
  });
}

/** Milestones that need a look, for the admin. */
export async function milestonesWithAttention(db: Database, actor: Actor | null) {
  requireAccess(actor, 'admin.view');
  const rows = await db.select().from(milestone).where(eq(milestone.money, 'releasing'));
  const more = await db.select().from(milestone).where(eq(milestone.money, 'refunding'));
  const split = await db.select().from(milestone).where(eq(milestone.money, 'splitting'));
  return [...rows, ...more, ...split]
    .filter((row) => row.attention !== null)
    .map((row) => ({
      id: row.id,
      orderId: row.orderId,
      kind: row.kind,
      money: row.money,
      attention: row.attention,
      releaseAmount: row.releaseAmount,
      refundAmount: row.refundAmount,
    }));
}
