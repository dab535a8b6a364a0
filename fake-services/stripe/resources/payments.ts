/** How a payment runs: from a payment method to a charge, a balance transaction and the events about it. */
import type { Stripe } from 'stripe';
import { declineMessage, type CardBehaviour } from '../cards.ts';
import type { ChargeRecord, IntentRecord } from '../core/records.ts';
import { formatAmount, processingFee } from '../core/money.ts';
import type { PaymentService } from '../core/service.ts';
import { openDispute } from './disputes.ts';
import { newCharge } from './new-charge.ts';

export type AttemptResult = 'succeeded' | 'processing' | 'declined' | 'requires_action';

function takeFunds(service: PaymentService, charge: Stripe.Charge, card: CardBehaviour): void {
  const transaction = service.addBalanceTransaction({
    type: card.kind === 'card' ? 'charge' : 'payment',
    reportingCategory: 'charge',
    amount: charge.amount,
    fee: processingFee(charge.amount, charge.currency),
    currency: charge.currency,
    source: charge.id,
    availableOn: service.fundsAvailableOn(card.bypassPending),
    description: charge.description,
  });
  charge.balance_transaction = transaction.id;
}

function saveIntent(
  service: PaymentService,
  record: IntentRecord,
  changes: Partial<Stripe.PaymentIntent>,
): void {
  Object.assign(record.object, changes);
  service.store.tables.intents.put(record.object.id, record);
}

function failIntent(
  service: PaymentService,
  record: IntentRecord,
  card: CardBehaviour,
  chargeId: string,
): void {
  saveIntent(service, record, {
    status: 'requires_payment_method',
    latest_charge: chargeId,
    next_action: null,
    payment_method: null,
    last_payment_error: {
      type: 'card_error',
      charge: chargeId,
      ...(card.code === null ? {} : { code: card.code as Stripe.PaymentIntent.LastPaymentError.Code }),
      ...(card.declineCode === null ? {} : { decline_code: card.declineCode }),
      message: declineMessage(card),
    },
  });
  service.emit('payment_intent.payment_failed', record.object);
}

/** Tries to take the payment with this card. The session, if there is one, is the caller's business. */
export function attemptPayment(
  service: PaymentService,
  record: IntentRecord,
  card: CardBehaviour,
  authenticated: boolean,
): AttemptResult {
  const intent = record.object;
  record.pendingCard = null;
  if (card.authenticate && !authenticated) {
    record.pendingCard = card;
    const url = `${service.publicUrl}/confirm/${intent.id}`;
    saveIntent(service, record, {
      status: 'requires_action',
      next_action: { type: 'redirect_to_url', redirect_to_url: { url, return_url: null } },
    });
    service.emit('payment_intent.requires_action', intent);
    return 'requires_action';
  }
  const failed = card.kind === 'card' && card.outcome === 'decline';
  const status = failed ? 'failed' : card.kind === 'bank_debit' ? 'pending' : 'succeeded';
  const charge = newCharge(service, intent, card, status);
  const row: ChargeRecord = {
    object: charge,
    behaviour: card,
    settlesAt: status === 'pending' ? service.now() + card.settleAfter : null,
  };
  if (status === 'succeeded') takeFunds(service, charge, card);
  service.store.tables.charges.put(charge.id, row);
  if (status === 'failed') {
    service.emit('charge.failed', charge);
    failIntent(service, record, card, charge.id);
    return 'declined';
  }
  if (status === 'pending') {
    saveIntent(service, record, { status: 'processing', latest_charge: charge.id, next_action: null });
    service.emit('charge.pending', charge);
    service.emit('payment_intent.processing', intent);
    return 'processing';
  }
  completeIntent(service, record, charge);
  service.emit('charge.succeeded', charge);
  service.emit('payment_intent.succeeded', intent);
  if (card.dispute !== 'none') {
    openDispute(service, row, {
      amount: charge.amount,
      reason: card.dispute === 'product_not_received' ? 'product_not_received' : 'fraudulent',
      inquiry: card.dispute === 'inquiry',
    });
  }
  return 'succeeded';
}

function completeIntent(service: PaymentService, record: IntentRecord, charge: Stripe.Charge): void {
  saveIntent(service, record, {
    status: 'succeeded',
    latest_charge: charge.id,
    amount_received: charge.amount,
    next_action: null,
    last_payment_error: null,
  });
}

/** The holder refused or failed the bank's confirmation. */
export function failAuthentication(service: PaymentService, record: IntentRecord): void {
  record.pendingCard = null;
  saveIntent(service, record, {
    status: 'requires_payment_method',
    next_action: null,
    last_payment_error: {
      type: 'card_error',
      code: 'payment_intent_authentication_failure',
      message: 'The bank could not confirm this payment. Choose another way to pay.',
    },
  });
  service.emit('payment_intent.payment_failed', record.object);
}

/** A bank debit's result became known. */
export function settleCharge(service: PaymentService, row: ChargeRecord): void {
  const { object: charge, behaviour } = row;
  row.settlesAt = null;
  const intent =
    typeof charge.payment_intent === 'string'
      ? service.store.tables.intents.get(charge.payment_intent)
      : undefined;
  if (behaviour.outcome === 'succeed') {
    charge.status = 'succeeded';
    charge.paid = true;
    takeFunds(service, charge, behaviour);
    service.store.tables.charges.put(charge.id, row);
    if (intent !== undefined) completeIntent(service, intent, charge);
    service.emit('charge.succeeded', charge);
    if (intent !== undefined) service.emit('payment_intent.succeeded', intent.object);
  } else {
    charge.status = 'failed';
    charge.failure_code = behaviour.code;
    charge.failure_message = declineMessage(behaviour);
    service.store.tables.charges.put(charge.id, row);
    service.emit('charge.failed', charge);
    if (intent !== undefined) failIntent(service, intent, behaviour, charge.id);
  }
  const session = intent?.session == null ? undefined : service.store.tables.sessions.get(intent.session);
  if (session === undefined) return;
  if (behaviour.outcome === 'succeed') session.object.payment_status = 'paid';
  service.store.tables.sessions.put(session.object.id, session);
  service.emit(
    behaviour.outcome === 'succeed'
      ? 'checkout.session.async_payment_succeeded'
      : 'checkout.session.async_payment_failed',
    session.object,
  );
}

export interface NewIntent {
  amount: number;
  currency: string;
  description: string | null;
  metadata: Record<string, string>;
  transferGroup: string | null;
  receiptEmail: string | null;
  statementDescriptorSuffix: string | null;
  session: string | null;
  types: string[];
}

export function createIntent(service: PaymentService, given: NewIntent): IntentRecord {
  const id = service.store.id('pi');
  const object = {
    id,
    object: 'payment_intent',
    allowed_payment_method_types: null,
    amount: given.amount,
    amount_capturable: 0,
    amount_received: 0,
    application: null,
    application_fee_amount: null,
    automatic_payment_methods: { enabled: true },
    canceled_at: null,
    cancellation_reason: null,
    capture_method: 'automatic_async',
    client_secret: `${id}_secret_${service.store.id('s').slice(2)}`,
    confirmation_method: 'automatic',
    created: service.now(),
    currency: given.currency,
    customer: null,
    customer_account: null,
    description: given.description,
    excluded_payment_method_types: null,
    last_payment_error: null,
    latest_charge: null,
    livemode: false,
    managed_payments: null,
    metadata: given.metadata,
    next_action: null,
    on_behalf_of: null,
    payment_method: null,
    payment_method_configuration_details: null,
    payment_method_options: null,
    payment_method_types: given.types,
    payment_record: null,
    processing: null,
    receipt_email: given.receiptEmail,
    review: null,
    setup_future_usage: null,
    shipping: null,
    source: null,
    statement_descriptor: null,
    statement_descriptor_suffix: given.statementDescriptorSuffix,
    status: 'requires_payment_method',
    transfer_data: null,
    transfer_group: given.transferGroup,
  } satisfies Stripe.PaymentIntent;
  const record: IntentRecord = { object, session: given.session, pendingCard: null };
  service.store.tables.intents.put(id, record);
  service.emit('payment_intent.created', object);
  return record;
}

export function describeAmount(intent: Stripe.PaymentIntent): string {
  return formatAmount(intent.amount, intent.currency);
}
