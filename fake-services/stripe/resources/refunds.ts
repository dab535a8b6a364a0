/** Refunds of card payments: full or partial, at once, later, or failing later. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam, missing, refused } from '../core/errors.ts';
import { inRange, listPage } from '../core/listing.ts';
import { assertPositive, formatAmount } from '../core/money.ts';
import { bool, expand, int, mergeMetadata, metadata, page, range, text } from '../core/params.ts';
import type { ChargeRecord, RefundRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { findCharge } from './charges.ts';

const createSchema = z.strictObject({
  amount: int().optional(),
  charge: text().optional(),
  payment_intent: text().optional(),
  metadata: metadata(),
  reason: z.enum(['duplicate', 'fraudulent', 'requested_by_customer']).optional(),
  refund_application_fee: bool().optional(),
  reverse_transfer: bool().optional(),
  expand: expand(),
});
type CreateParams = z.output<typeof createSchema>;

function chargeOf(service: PaymentService, params: CreateParams): ChargeRecord {
  if (params.charge !== undefined) return findCharge(service, params.charge);
  if (params.payment_intent === undefined) {
    throw invalidParam(
      'parameter_missing',
      'One of the following params should be provided for this request: payment_intent or charge.',
    );
  }
  const intent = service.store.tables.intents.get(params.payment_intent);
  if (intent === undefined) throw missing('payment_intent', params.payment_intent, 'payment_intent');
  if (typeof intent.object.latest_charge !== 'string' || intent.object.status !== 'succeeded') {
    throw refused(
      undefined,
      `This PaymentIntent (${params.payment_intent}) does not have a successful charge to refund.`,
      'payment_intent',
    );
  }
  return findCharge(service, intent.object.latest_charge);
}

function assertRefundable(charge: Stripe.Charge, amount: number): void {
  if (charge.status !== 'succeeded')
    throw refused(undefined, `Charge ${charge.id} has not succeeded and cannot be refunded.`);
  if (charge.disputed) {
    throw refused(
      'charge_disputed',
      `Charge ${charge.id} has been charged back; cannot issue a refund.`,
      'charge',
    );
  }
  const left = charge.amount - charge.amount_refunded;
  if (left === 0)
    throw refused('charge_already_refunded', `Charge ${charge.id} has already been refunded.`, 'charge');
  assertPositive(amount);
  if (amount > left) {
    throw refused(
      undefined,
      `Refund amount (${formatAmount(amount, charge.currency)}) is greater than unrefunded amount on charge (${formatAmount(left, charge.currency)})`,
      'amount',
    );
  }
}

/** The platform's funds leave when the refund is funded; a pending one waits for the balance. */
function takeFunds(service: PaymentService, refund: Stripe.Refund, charge: Stripe.Charge): void {
  const source = service.store.tables.balanceTransactions.get(String(charge.balance_transaction));
  const transaction = service.addBalanceTransaction({
    type: 'refund',
    reportingCategory: 'refund',
    amount: -refund.amount,
    currency: refund.currency,
    source: refund.id,
    // A refund of funds that still wait comes out of the same waiting pot.
    availableOn: Math.max(service.now(), source?.available_on ?? 0),
    description: charge.description,
  });
  refund.balance_transaction = transaction.id;
}

function funded(service: PaymentService, amount: number, currency: string): boolean {
  return service.balance.availableIn(currency) + service.balance.pendingIn(currency) >= amount;
}

function create(service: PaymentService, params: CreateParams): Stripe.Refund {
  const row = chargeOf(service, params);
  const charge = row.object;
  const amount = params.amount ?? charge.amount - charge.amount_refunded;
  assertRefundable(charge, amount);
  const behaviour = row.behaviour.refund;
  const enough = funded(service, amount, charge.currency);
  const waits = !enough || behaviour === 'pending-then-succeed';
  const refund: Stripe.Refund = {
    id: service.store.id('re'),
    object: 'refund',
    amount,
    balance_transaction: null,
    charge: charge.id,
    created: service.now(),
    currency: charge.currency,
    customer: null,
    customer_account: null,
    destination_details: {
      type: 'card',
      card: { type: 'refund', reference_status: 'pending', reference_type: 'acquirer_reference_number' },
    },
    metadata: mergeMetadata({}, params.metadata),
    payment_intent: charge.payment_intent,
    payment_method: null,
    ...(waits ? { pending_reason: enough ? 'processing' : 'insufficient_funds' } : {}),
    reason: params.reason ?? null,
    receipt_number: null,
    source_transfer_reversal: null,
    status: waits ? 'pending' : 'succeeded',
    transfer_reversal: null,
  } satisfies Stripe.Refund;
  if (enough) takeFunds(service, refund, charge);
  const record: RefundRecord = {
    object: refund,
    settlesAt: behaviour === 'succeed' ? null : service.now() + 2,
    outcome: behaviour === 'succeed' ? null : behaviour === 'succeed-then-fail' ? 'fail' : 'succeed',
  };
  service.store.tables.refunds.put(refund.id, record);
  charge.amount_refunded += amount;
  charge.refunded = charge.amount_refunded === charge.amount;
  service.store.tables.charges.put(charge.id, row);
  service.emit('refund.created', refund);
  service.emit('charge.refunded', charge);
  return refund;
}

export function completeRefund(service: PaymentService, record: RefundRecord): void {
  const refund = record.object;
  record.settlesAt = null;
  record.outcome = null;
  if (refund.status !== 'pending') return;
  const charge = findCharge(service, String(refund.charge)).object;
  if (refund.balance_transaction === null) takeFunds(service, refund, charge);
  refund.status = 'succeeded';
  delete refund.pending_reason;
  service.store.tables.refunds.put(refund.id, record);
  service.emit('refund.updated', refund);
}

/** The bank sent the money back: it returns to the platform's balance and the charge is refundable again. */
export function failRefund(
  service: PaymentService,
  record: RefundRecord,
  reason = 'lost_or_stolen_card',
): void {
  const refund = record.object;
  record.settlesAt = null;
  record.outcome = null;
  if (refund.status === 'failed' || refund.status === 'canceled') return;
  if (refund.balance_transaction !== null) {
    const transaction = service.addBalanceTransaction({
      type: 'refund_failure',
      reportingCategory: 'refund_failure',
      amount: refund.amount,
      currency: refund.currency,
      source: refund.id,
      description: 'Refund failure',
    });
    refund.failure_balance_transaction = transaction.id;
  }
  refund.status = 'failed';
  refund.failure_reason = reason;
  delete refund.pending_reason;
  service.store.tables.refunds.put(refund.id, record);
  restoreCharge(service, refund);
  service.emit('refund.failed', refund);
  service.emit('refund.updated', refund);
}

function restoreCharge(service: PaymentService, refund: Stripe.Refund): void {
  const row = service.store.tables.charges.get(String(refund.charge));
  if (row === undefined) return;
  row.object.amount_refunded -= refund.amount;
  row.object.refunded = row.object.amount_refunded === row.object.amount;
  service.store.tables.charges.put(row.object.id, row);
}

/** Pending refunds that waited for funds go on as soon as there are enough. */
export function fundWaitingRefunds(service: PaymentService): void {
  for (const record of service.store.tables.refunds.all()) {
    const refund = record.object;
    if (
      refund.status === 'pending' &&
      refund.pending_reason === 'insufficient_funds' &&
      funded(service, refund.amount, refund.currency)
    ) {
      completeRefund(service, record);
    }
  }
}

function find(service: PaymentService, id: string): RefundRecord {
  const record = service.store.tables.refunds.get(id);
  if (record === undefined) throw missing('refund', id, 'refund');
  return record;
}

export const refundRoutes = [
  route('POST', '/v1/refunds', createSchema, create),
  route(
    'GET',
    '/v1/refunds/:id',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => find(service, id).object,
  ),
  route(
    'POST',
    '/v1/refunds/:id',
    z.strictObject({ metadata: metadata(), expand: expand() }),
    (service, params, id) => {
      const record = find(service, id);
      record.object.metadata = mergeMetadata(record.object.metadata ?? {}, params.metadata);
      service.store.tables.refunds.put(id, record);
      service.emit('refund.updated', record.object);
      return record.object;
    },
  ),
  route('POST', '/v1/refunds/:id/cancel', z.strictObject({ expand: expand() }), (service, _params, id) => {
    find(service, id);
    throw refused(undefined, 'Only refunds that require the customer to act can be canceled.', 'refund');
  }),
  route(
    'GET',
    '/v1/refunds',
    z.strictObject({
      ...page,
      charge: text().optional(),
      payment_intent: text().optional(),
      created: range(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.refunds
          .all()
          .map((row) => row.object)
          .filter(
            (refund) =>
              (params.charge === undefined || refund.charge === params.charge) &&
              (params.payment_intent === undefined || refund.payment_intent === params.payment_intent) &&
              inRange(refund.created, params.created),
          ),
        params,
        '/v1/refunds',
      ),
  ),
];
