import { finalMoneyStates } from '../../domain/milestone-states.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { moveOrder } from './acknowledge-order.ts';
import { requestForUpdate, setRequestState } from '../requests/index.ts';
import { milestonesOf, openDisputesOf, unsafeOrder } from './queries.ts';
import { tell } from './tell.ts';

/** A suspended order goes on once a milestone is funded. */
export async function resumeAfterFunding(tx: Tx, by: By, orderId: string): Promise<void> {
  const order = await unsafeOrder(tx, orderId);
  if (order.state !== 'suspended') return;
  await moveOrder(tx, by, order, 'resume');
  await tell(tx, order, {
    kind: 'order-resumed',
    by,
    side: null,
    text: 'The payment has arrived; the order goes on.',
    subject: 'order goes on',
    action: 'Open the order',
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
}

/**
 * The order is done when every milestone is closed and its money has come to its end. An order whose
 * end was declared is ended already; then nothing happens here.
 */
export async function finishIfDone(tx: Tx, by: By, orderId: string): Promise<boolean> {
  const order = await unsafeOrder(tx, orderId);
  if (order.state !== 'running' && order.state !== 'suspended') return false;
  const rows = await milestonesOf(tx, orderId);
  const closed = rows.every(
    (row) =>
      (row.work === 'accepted' && finalMoneyStates.includes(row.money)) ||
      (row.work === 'cancelled' && (row.money === 'unfunded' || finalMoneyStates.includes(row.money))),
  );
  if (!closed || (await openDisputesOf(tx, { orderId })).length > 0) return false;
  await moveOrder(tx, by, order, 'finish', { closedAt: await businessNow(tx) });
  await closeRequest(tx, by, order.requestId, 'finish');
  await tell(tx, order, {
    kind: 'order-done',
    by: 'system',
    side: null,
    text: 'All milestones are closed; the order is done.',
    subject: 'order done',
    action: 'Open the order',
    buyer: ['purchaser', 'engineer'],
    fabricator: ['estimator', 'builder'],
  });
  return true;
}

/** The request follows its order: done, ended, or open for another award when nothing had started. */
export async function closeRequest(
  tx: Tx,
  by: By,
  requestId: string,
  event: 'finish' | 'end' | 're-open',
): Promise<void> {
  await setRequestState(tx, by, await requestForUpdate(tx, requestId), event);
}
