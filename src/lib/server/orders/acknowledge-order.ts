import type { Actor } from '../../domain/actor.ts';
import { orderMachine, type OrderState } from '../../domain/order-states.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { coilOrder } from '../db/schema/orders.ts';
import { transition } from '../db/transition.ts';
import { openWhatCanStart } from './milestones.ts';
import { orderFor, type OrderRow } from './queries.ts';
import { tell } from './tell.ts';

export type OrderEventName = (typeof orderMachine)['transitions'][number]['event'];

/** Moves the state of an order. */
export async function moveOrder(
  tx: Tx,
  by: By,
  order: Pick<OrderRow, 'id' | 'state' | 'buyerCompanyId'>,
  event: OrderEventName,
  set: Partial<typeof coilOrder.$inferInsert> = {},
): Promise<OrderState> {
  return transition(tx, {
    machine: orderMachine,
    table: coilOrder,
    column: coilOrder.state,
    columnName: 'state',
    id: order.id,
    from: order.state,
    event,
    by,
    companyId: order.buyerCompanyId,
    set,
  });
}

/** The fabricator takes the order on; the first milestone then waits for its funding. */
export async function acknowledgeOrder(
  db: Database,
  actor: Actor | null,
  input: { orderId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.acknowledge', input.orderId);
    const by = actor as Actor;
    requireVerifiedEmail(by);
    await moveOrder(tx, by, order, 'acknowledge', {
      acknowledgedAt: await businessNow(tx),
      acknowledgedBy: by.userId,
    });
    await tell(tx, order, {
      kind: 'order-acknowledged',
      by,
      side: 'fabricator',
      text: `${order.fabricatorName} has acknowledged the order.`,
      subject: 'order acknowledged',
      action: 'Open the order',
      buyer: ['purchaser', 'engineer'],
      fabricator: ['estimator', 'builder'],
    });
    await openWhatCanStart(tx, by, order.id);
  });
}
