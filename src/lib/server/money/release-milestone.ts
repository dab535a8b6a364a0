import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import {
  acceptWork,
  milestoneFor,
  openDisputesOf,
  setAttention,
  unsafeMilestone,
  type MilestoneRow,
  type OrderRow,
} from '../orders/index.ts';
import { heldBalance } from './ledger.ts';
import { moveHeldMoney } from './move-held.ts';
import { payoutReady } from './payout-ready.ts';
import { tellPayeeRestricted } from './tell-money.ts';

/** Why a milestone cannot be released now, in words; null when it can. */
export function releaseObstacle(
  order: Pick<OrderRow, 'state'>,
  row: Pick<MilestoneRow, 'work' | 'money'>,
  disputed: boolean,
): string | null {
  if (disputed) return 'A dispute is open on this milestone. It has to be settled or decided first.';
  if (order.state !== 'running' && order.state !== 'suspended') return 'The order is closed or not started.';
  if (row.money === 'unfunded' || row.money === 'paying') return 'Nothing is held for this milestone.';
  if (row.money !== 'held') return 'The money of this milestone is on its way or gone already.';
  if (row.work !== 'submitted' && row.work !== 'accepted')
    return 'This milestone has not been submitted yet.';
  return null;
}

/** The common path of a release by the buyer and by the end of the window; the caller has authorised. */
export async function startRelease(tx: Tx, by: By, order: OrderRow, row: MilestoneRow): Promise<void> {
  const disputed = (await openDisputesOf(tx, { milestoneId: row.id })).length > 0;
  const obstacle = releaseObstacle(order, row, disputed);
  if (obstacle) throw new AppError('state-conflict', { detail: obstacle });
  if (row.work === 'submitted') await acceptWork(tx, by, row.id);
  const now = await unsafeMilestone(tx, row.id);
  await moveHeldMoney(tx, by, order, now, { release: await heldBalance(tx, row.id), refund: 0 });
}

/** The buyer releases a milestone: its work is accepted, and its money goes to the fabricator less the fee. */
export async function releaseMilestone(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string; version?: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'milestone.release', input.milestoneId);
    const by = actor as Actor;
    requireVerifiedEmail(by);
    if (input.version !== undefined && input.version !== milestone.version) {
      const obstacle = releaseObstacle(order, milestone, false);
      throw new AppError('version-conflict', obstacle ? { detail: obstacle } : {});
    }
    if (!(await payoutReady(tx, order.fabricatorCompanyId))) throw new AppError('payout-not-ready');
    await startRelease(tx, by, order, milestone);
  });
}

/**
 * The end of the inspection window: accepts and releases. A fabricator whose payout account cannot
 * receive keeps the money held; both are told, and it goes out once the account is in order.
 */
export async function releaseByWindow(tx: Tx, order: OrderRow, row: MilestoneRow): Promise<boolean> {
  if (!(await payoutReady(tx, order.fabricatorCompanyId))) {
    if (row.attention !== 'payee-restricted') {
      await setAttention(tx, row.id, 'payee-restricted');
      await tellPayeeRestricted(tx, order, row, `window/${row.id}`);
    }
    return false;
  }
  await startRelease(tx, 'system', order, row);
  return true;
}
