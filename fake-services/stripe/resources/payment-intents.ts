import type { Stripe } from 'stripe';
import { z } from 'zod';
import { TEST_CARDS, TEST_METHODS, type CardBehaviour } from '../cards.ts';
import { ApiError, invalidParam, missing, refused } from '../core/errors.ts';
import { inRange, listPage } from '../core/listing.ts';
import { assertChargeable } from '../core/money.ts';
import {
  bool,
  currency,
  email,
  expand,
  int,
  mergeMetadata,
  metadata,
  page,
  range,
  text,
  url,
} from '../core/params.ts';
import type { IntentRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { attemptPayment, createIntent } from './payments.ts';

const createSchema = z.strictObject({
  amount: int(),
  currency: currency(),
  automatic_payment_methods: z
    .strictObject({ enabled: bool(), allow_redirects: z.enum(['always', 'never']).optional() })
    .optional(),
  capture_method: z.enum(['automatic', 'automatic_async']).optional(),
  confirm: bool().optional(),
  description: text(1000).optional(),
  metadata: metadata(),
  payment_method: text().optional(),
  receipt_email: email().optional(),
  return_url: url().optional(),
  statement_descriptor_suffix: text(22).optional(),
  transfer_group: text(200).optional(),
  expand: expand(),
});

const confirmSchema = z.strictObject({
  payment_method: text().optional(),
  receipt_email: email().optional(),
  return_url: url().optional(),
  expand: expand(),
});

function cardOf(method: string | undefined): CardBehaviour {
  if (method === undefined) {
    throw invalidParam(
      'payment_intent_unexpected_state',
      "You cannot confirm this PaymentIntent because it's missing a payment method.",
      'payment_method',
    );
  }
  const card = TEST_CARDS[TEST_METHODS[method] ?? ''];
  if (card === undefined)
    throw invalidParam('resource_missing', `No such PaymentMethod: '${method}'`, 'payment_method');
  return card;
}

function find(service: PaymentService, id: string): IntentRecord {
  const record = service.store.tables.intents.get(id);
  if (record === undefined) throw missing('payment_intent', id, 'intent');
  return record;
}

function assertOwn(record: IntentRecord, verb: string): void {
  if (record.session !== null) {
    throw refused(
      'payment_intent_unexpected_state',
      `You cannot ${verb} this PaymentIntent because it belongs to a Checkout Session. Expire the session instead.`,
    );
  }
}

function confirm(
  service: PaymentService,
  record: IntentRecord,
  method: string | undefined,
): Stripe.PaymentIntent {
  const card = cardOf(method);
  const intent = record.object;
  if (!['requires_payment_method', 'requires_confirmation', 'requires_action'].includes(intent.status)) {
    throw refused(
      'payment_intent_unexpected_state',
      `You cannot confirm this PaymentIntent because it has already ${intent.status === 'succeeded' ? 'succeeded after being previously confirmed' : intent.status}.`,
    );
  }
  const result = attemptPayment(service, record, card, false);
  if (result === 'declined') {
    throw new ApiError(
      402,
      {
        type: 'card_error',
        code: card.code ?? 'card_declined',
        ...(card.declineCode === null ? {} : { decline_code: card.declineCode }),
        message: intent.last_payment_error?.message ?? 'Your card was declined.',
        charge: String(intent.latest_charge),
        payment_intent: structuredClone(intent),
      },
      { stored: true },
    );
  }
  return intent;
}

export const paymentIntentRoutes = [
  route('POST', '/v1/payment_intents', createSchema, (service, params) => {
    assertChargeable(params.amount, params.currency, 'amount');
    if (params.confirm === true) cardOf(params.payment_method);
    const record = createIntent(service, {
      amount: params.amount,
      currency: params.currency,
      description: params.description ?? null,
      metadata: mergeMetadata({}, params.metadata),
      transferGroup: params.transfer_group ?? null,
      receiptEmail: params.receipt_email ?? null,
      statementDescriptorSuffix: params.statement_descriptor_suffix ?? null,
      session: null,
      types: ['card'],
    });
    return params.confirm === true ? confirm(service, record, params.payment_method) : record.object;
  }),
  route(
    'GET',
    '/v1/payment_intents/:id',
    z.strictObject({ expand: expand(), client_secret: text().optional() }),
    (service, _params, id) => find(service, id).object,
  ),
  route(
    'POST',
    '/v1/payment_intents/:id',
    z.strictObject({
      description: text(1000).optional(),
      metadata: metadata(),
      transfer_group: text(200).optional(),
      expand: expand(),
    }),
    (service, params, id) => {
      const record = find(service, id);
      const intent = record.object;
      if (params.transfer_group !== undefined && intent.status === 'succeeded') {
        throw refused(
          'payment_intent_unexpected_state',
          'transfer_group cannot be changed once the payment succeeded.',
        );
      }
      intent.metadata = mergeMetadata(intent.metadata, params.metadata);
      if (params.description !== undefined) intent.description = params.description;
      if (params.transfer_group !== undefined) intent.transfer_group = params.transfer_group;
      service.store.tables.intents.put(id, record);
      return intent;
    },
  ),
  route('POST', '/v1/payment_intents/:id/confirm', confirmSchema, (service, params, id) => {
    const record = find(service, id);
    assertOwn(record, 'confirm');
    return confirm(service, record, params.payment_method);
  }),
  route(
    'POST',
    '/v1/payment_intents/:id/cancel',
    z.strictObject({
      cancellation_reason: z
        .enum(['duplicate', 'fraudulent', 'requested_by_customer', 'abandoned'])
        .optional(),
      expand: expand(),
    }),
    (service, params, id) => {
      const record = find(service, id);
      assertOwn(record, 'cancel');
      const intent = record.object;
      if (['succeeded', 'canceled', 'processing'].includes(intent.status)) {
        throw refused(
          'payment_intent_unexpected_state',
          `You cannot cancel this PaymentIntent because it has a status of ${intent.status}.`,
        );
      }
      Object.assign(intent, {
        status: 'canceled',
        canceled_at: service.now(),
        cancellation_reason: params.cancellation_reason ?? null,
      } satisfies Partial<Stripe.PaymentIntent>);
      service.store.tables.intents.put(id, record);
      service.emit('payment_intent.canceled', intent);
      return intent;
    },
  ),
  route('GET', '/v1/payment_intents', z.strictObject({ ...page, created: range() }), (service, params) =>
    listPage(
      service.store.tables.intents
        .all()
        .map((row) => row.object)
        .filter((intent) => inRange(intent.created, params.created)),
      params,
      '/v1/payment_intents',
    ),
  ),
];
