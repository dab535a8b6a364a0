/** Transfers from the platform's balance to connected accounts, and their reversals. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam, missing, refused } from '../core/errors.ts';
import { inRange, listPage } from '../core/listing.ts';
import { assertCurrency, assertPositive, formatAmount } from '../core/money.ts';
import { bool, currency, expand, int, mergeMetadata, metadata, page, range, text } from '../core/params.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { findCharge } from './charges.ts';

const createSchema = z.strictObject({
  amount: int(),
  currency: currency(),
  destination: text(),
  description: text(1000).optional(),
  metadata: metadata(),
  source_transaction: text().optional(),
  source_type: z.enum(['card', 'bank_account', 'fpx']).optional(),
  transfer_group: text(200).optional(),
  expand: expand(),
});
type CreateParams = z.output<typeof createSchema>;

function assertPayable(service: PaymentService, id: string): void {
  const account = service.store.tables.accounts.get(id);
  if (account === undefined || account.object.closed === true) {
    throw invalidParam('resource_missing', `No such destination: '${id}'`, 'destination');
  }
  if (account.transfers === 'rejected') {
    throw refused('transfers_not_allowed', `Transfers to account ${id} are not allowed.`, 'destination');
  }
  if (account.transfers !== 'active') {
    throw refused(
      'insufficient_capabilities_for_transfer',
      'Your destination account needs to have at least one of the following capabilities enabled: transfers, crypto_transfers, legacy_payments',
      'destination',
    );
  }
}

/** Where the money comes from: a named charge, or what is available. Returns when the transfer is available. */
function assertFunded(
  service: PaymentService,
  params: CreateParams,
): { availableOn: number; group: string | null } {
  if (params.source_transaction === undefined) {
    const available = service.balance.availableIn(params.currency);
    if (available < params.amount) {
      throw refused(
        'balance_insufficient',
        `You have insufficient available funds in your account (${formatAmount(available, params.currency)}). Try naming the charge with source_transaction, or wait until its funds are available.`,
      );
    }
    return { availableOn: service.now(), group: null };
  }
  const { object: charge } = findCharge(service, params.source_transaction, 'source_transaction');
  if (charge.status !== 'succeeded') {
    throw refused(undefined, `Charge ${charge.id} has not succeeded.`, 'source_transaction');
  }
  if (charge.currency !== params.currency) {
    throw refused(
      'transfer_source_balance_parameters_mismatch',
      `The currency of source_transaction's balance transaction (${charge.currency}) must be the same as the transfer currency (${params.currency})`,
      'currency',
    );
  }
  const taken = service.store.tables.transfers
    .all()
    .filter((row) => row.source_transaction === charge.id)
    .reduce((sum, row) => sum + row.amount - row.amount_reversed, 0);
  if (taken + params.amount > charge.amount) {
    throw refused(
      undefined,
      `Transfers using this transaction as a source must not exceed the source amount of ${formatAmount(charge.amount, charge.currency)}. (There is already ${formatAmount(taken, charge.currency)} transferred.)`,
      'amount',
    );
  }
  const source = service.store.tables.balanceTransactions.get(String(charge.balance_transaction));
  return {
    availableOn: Math.max(service.now(), source?.available_on ?? 0),
    group: charge.transfer_group ?? `group_${charge.id}`,
  };
}

function create(service: PaymentService, params: CreateParams): Stripe.Transfer {
  assertCurrency(params.currency);
  assertPositive(params.amount);
  assertPayable(service, params.destination);
  const { availableOn, group } = assertFunded(service, params);
  const id = service.store.id('tr');
  const transaction = service.addBalanceTransaction({
    type: 'transfer',
    reportingCategory: 'transfer',
    amount: -params.amount,
    currency: params.currency,
    source: id,
    availableOn,
    description: params.description ?? null,
  });
  const transfer = {
    id,
    object: 'transfer',
    amount: params.amount,
    amount_reversed: 0,
    balance_transaction: transaction.id,
    created: service.now(),
    currency: params.currency,
    description: params.description ?? null,
    destination: params.destination,
    destination_payment: service.store.id('py'),
    livemode: false,
    metadata: mergeMetadata({}, params.metadata),
    reversals: { object: 'list', data: [], has_more: false, url: `/v1/transfers/${id}/reversals` },
    reversed: false,
    source_transaction: params.source_transaction ?? null,
    source_type: params.source_type ?? 'card',
    transfer_group: params.transfer_group ?? group,
  } satisfies Stripe.Transfer;
  service.store.tables.transfers.put(id, transfer);
  credit(service, params.destination, params.currency, params.amount);
  service.emit('transfer.created', transfer);
  return transfer;
}

function credit(service: PaymentService, accountId: string, code: string, amount: number): void {
  const account = service.store.tables.accounts.get(accountId);
  if (account === undefined) return;
  account.balances[code] = (account.balances[code] ?? 0) + amount;
  service.store.tables.accounts.put(accountId, account);
}

function find(service: PaymentService, id: string): Stripe.Transfer {
  const transfer = service.store.tables.transfers.get(id);
  if (transfer === undefined) throw missing('transfer', id, 'transfer');
  return transfer;
}

const reversalSchema = z.strictObject({
  amount: int().optional(),
  description: text(1000).optional(),
  metadata: metadata(),
  refund_application_fee: bool().optional(),
  expand: expand(),
});

function reverse(
  service: PaymentService,
  params: z.output<typeof reversalSchema>,
  id: string,
): Stripe.TransferReversal {
  const transfer = find(service, id);
  const left = transfer.amount - transfer.amount_reversed;
  const amount = params.amount ?? left;
  if (left === 0) throw refused(undefined, `Transfer ${id} is already fully reversed.`, 'id');
  assertPositive(amount);
  if (amount > left) {
    throw refused(
      undefined,
      `Reversal amount (${formatAmount(amount, transfer.currency)}) is greater than unreversed amount on transfer (${formatAmount(left, transfer.currency)})`,
      'amount',
    );
  }
  const account = service.store.tables.accounts.get(String(transfer.destination));
  if ((account?.balances[transfer.currency] ?? 0) < amount) {
    throw refused(
      'balance_insufficient',
      'The connected account does not have enough funds to reverse this transfer.',
    );
  }
  const reversalId = service.store.id('trr');
  const transaction = service.addBalanceTransaction({
    type: 'transfer_refund',
    reportingCategory: 'transfer_reversal',
    amount,
    currency: transfer.currency,
    source: reversalId,
    description: params.description ?? null,
  });
  const reversal = {
    id: reversalId,
    object: 'transfer_reversal',
    amount,
    balance_transaction: transaction.id,
    created: service.now(),
    currency: transfer.currency,
    destination_payment_refund: null,
    metadata: mergeMetadata({}, params.metadata),
    source_refund: null,
    transfer: id,
  } satisfies Stripe.TransferReversal;
  service.store.tables.reversals.put(reversalId, reversal);
  transfer.amount_reversed += amount;
  transfer.reversed = transfer.amount_reversed === transfer.amount;
  transfer.reversals.data = [reversal, ...transfer.reversals.data].slice(0, 10);
  service.store.tables.transfers.put(id, transfer);
  credit(service, String(transfer.destination), transfer.currency, -amount);
  service.emit('transfer.reversed', transfer);
  return reversal;
}

export const transferRoutes = [
  route('POST', '/v1/transfers', createSchema, create),
  route('GET', '/v1/transfers/:id', z.strictObject({ expand: expand() }), (service, _params, id) =>
    find(service, id),
  ),
  route(
    'POST',
    '/v1/transfers/:id',
    z.strictObject({ metadata: metadata(), description: text(1000).optional(), expand: expand() }),
    (service, params, id) => {
      const transfer = find(service, id);
      transfer.metadata = mergeMetadata(transfer.metadata, params.metadata);
      if (params.description !== undefined) transfer.description = params.description;
      service.store.tables.transfers.put(id, transfer);
      service.emit('transfer.updated', transfer);
      return transfer;
    },
  ),
  route(
    'GET',
    '/v1/transfers',
    z.strictObject({
      ...page,
      destination: text().optional(),
      transfer_group: text().optional(),
      created: range(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.transfers
          .all()
          .filter(
            (row) =>
              (params.destination === undefined || row.destination === params.destination) &&
              (params.transfer_group === undefined || row.transfer_group === params.transfer_group) &&
              inRange(row.created, params.created),
          ),
        params,
        '/v1/transfers',
      ),
  ),
  route('POST', '/v1/transfers/:id/reversals', reversalSchema, reverse),
  route('GET', '/v1/transfers/:id/reversals', z.strictObject({ ...page }), (service, params, id) => {
    find(service, id);
    return listPage(
      service.store.tables.reversals.all().filter((row) => row.transfer === id),
      params,
      `/v1/transfers/${id}/reversals`,
    );
  }),
  route(
    'GET',
    '/v1/transfers/:id/reversals/:reversal',
    z.strictObject({ expand: expand() }),
    (service, _params, id, second) => {
      const reversal = service.store.tables.reversals.get(second);
      if (reversal === undefined || reversal.transfer !== id) throw missing('transfer reversal', second);
      return reversal;
    },
  ),
];
