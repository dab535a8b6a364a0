/** What happens by itself when time passes: sessions expire, debits and refunds settle, keys are pruned. */
import { expireSession } from '../resources/checkout-sessions.ts';
import { settleCharge } from '../resources/payments.ts';
import { completeRefund, failRefund, fundWaitingRefunds } from '../resources/refunds.ts';
import type { PaymentService } from './service.ts';

const DAY = 86_400;

export function tick(service: PaymentService): void {
  const { tables } = service.store;
  const now = service.now();
  for (const row of tables.sessions.all()) {
    if (row.object.status === 'open' && row.object.expires_at <= now) expireSession(service, row);
  }
  for (const row of tables.charges.all()) {
    if (row.settlesAt !== null && row.settlesAt <= now) settleCharge(service, row);
  }
  for (const row of tables.refunds.all()) {
    if (row.settlesAt === null || row.settlesAt > now) continue;
    if (row.outcome === 'fail') failRefund(service, row);
    else completeRefund(service, row);
  }
  const gained = service.balance.sweep();
  if (gained.length > 0) {
    service.emit('balance.available', {
      object: 'balance',
      livemode: false,
      available: gained.map((currency) => ({ amount: service.balance.availableIn(currency), currency })),
      pending: gained.map((currency) => ({ amount: service.balance.pendingIn(currency), currency })),
    });
    fundWaitingRefunds(service);
  }
  pruneKeys(service, now - DAY);
}

/** Keys are remembered for at least 24 hours. */
export function pruneKeys(service: PaymentService, before: number): void {
  const { idempotency } = service.store.tables;
  // Oldest first, so the first young one ends the search.
  for (const [key, record] of idempotency.entries()) {
    if (record.createdAt > before) break;
    idempotency.delete(key);
  }
}
