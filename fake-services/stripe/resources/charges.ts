import type { Stripe } from 'stripe';
import { z } from 'zod';
import { missing } from '../core/errors.ts';
import { inRange, listPage } from '../core/listing.ts';
import { currency, expand, mergeMetadata, metadata, page, range, text } from '../core/params.ts';
import type { ChargeRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';

export function findCharge(service: PaymentService, id: string, param = 'charge'): ChargeRecord {
  const row = service.store.tables.charges.get(id);
  if (row === undefined) throw missing('charge', id, param);
  return row;
}

function balance(service: PaymentService): Stripe.Balance {
  const currencies = service.balance.currencies();
  return {
    object: 'balance',
    available: currencies.map((code) => {
      const amount = service.balance.availableIn(code);
      return { amount, currency: code, source_types: { card: amount } };
    }),
    livemode: false,
    pending: currencies.map((code) => {
      const amount = service.balance.pendingIn(code);
      return { amount, currency: code, source_types: { card: amount } };
    }),
  } satisfies Stripe.Balance;
}

/** The status of a balance transaction follows the clock. */
function current(service: PaymentService, row: Stripe.BalanceTransaction): Stripe.BalanceTransaction {
  return { ...row, status: row.available_on <= service.now() ? 'available' : 'pending' };
}

export const chargeRoutes = [
  route(
    'GET',
    '/v1/charges/:id',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => findCharge(service, id, 'charge').object,
  ),
  route(
    'POST',
    '/v1/charges/:id',
    z.strictObject({
      metadata: metadata(),
      description: text(1000).optional(),
      transfer_group: text(200).optional(),
      expand: expand(),
    }),
    (service, params, id) => {
      const row = findCharge(service, id);
      row.object.metadata = mergeMetadata(row.object.metadata, params.metadata);
      if (params.description !== undefined) row.object.description = params.description;
      if (params.transfer_group !== undefined) row.object.transfer_group = params.transfer_group;
      service.store.tables.charges.put(id, row);
      service.emit('charge.updated', row.object);
      return row.object;
    },
  ),
  route(
    'GET',
    '/v1/charges',
    z.strictObject({
      ...page,
      payment_intent: text().optional(),
      transfer_group: text().optional(),
      created: range(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.charges
          .all()
          .map((row) => row.object)
          .filter(
            (charge) =>
              (params.payment_intent === undefined || charge.payment_intent === params.payment_intent) &&
              (params.transfer_group === undefined || charge.transfer_group === params.transfer_group) &&
              inRange(charge.created, params.created),
          ),
        params,
        '/v1/charges',
      ),
  ),
  route('GET', '/v1/balance', z.strictObject({ expand: expand() }), (service) => balance(service)),
  route(
    'GET',
    '/v1/balance_transactions/:id',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => {
      const row = service.store.tables.balanceTransactions.get(id);
      if (row === undefined) throw missing('balance_transaction', id, 'id');
      return current(service, row);
    },
  ),
  route(
    'GET',
    '/v1/balance_transactions',
    z.strictObject({
      ...page,
      created: range(),
      currency: currency().optional(),
      source: text().optional(),
      type: text().optional(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.balanceTransactions
          .all()
          .filter(
            (row) =>
              (params.currency === undefined || row.currency === params.currency) &&
              (params.source === undefined || row.source === params.source) &&
              (params.type === undefined || row.type === params.type) &&
              inRange(row.created, params.created),
          )
          .map((row) => current(service, row)),
        params,
        '/v1/balance_transactions',
      ),
  ),
];
