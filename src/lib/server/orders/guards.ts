import { AppError } from '../../domain/errors.ts';
import { orderStateText } from '../../domain/order-states.ts';
import type { OrderRow } from './queries.ts';

/** Work goes on only while the order runs. */
export function requireRunning(order: Pick<OrderRow, 'state'>): void {
  if (order.state !== 'running') {
    throw new AppError('state-conflict', { detail: `The order is ${orderStateText[order.state]}.` });
  }
}

/** While a dispute is open the clocks stand still and nothing is judged. */
export function requireNoDispute(disputes: readonly unknown[]): void {
  if (disputes.length > 0) {
    throw new AppError('state-conflict', {
      detail: 'A dispute is open. It has to be settled or decided first.',
    });
  }
}
