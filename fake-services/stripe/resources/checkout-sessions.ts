/** Hosted payment pages: a session per payment, paid on a page of the stand-in's own design. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import type { CardBehaviour } from '../cards.ts';
import { invalidParam, missing, refused } from '../core/errors.ts';
import { registerIncludable } from '../core/expand.ts';
import { inRange, listPage } from '../core/listing.ts';
import { assertChargeable } from '../core/money.ts';
import {
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
import type { IntentRecord, SessionRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { attemptPayment, createIntent, failAuthentication, type AttemptResult } from './payments.ts';

const MINUTE = 60;
const HOUR = 3600;

const createSchema = z.strictObject({
  mode: z.enum(['payment', 'setup', 'subscription']),
  line_items: z
    .array(
      z.strictObject({
        price_data: z.strictObject({
          currency: currency(),
          unit_amount: int(),
          product_data: z.strictObject({
            name: text(250),
            description: text(1000).optional(),
            metadata: metadata(),
          }),
          tax_behavior: z.enum(['exclusive', 'inclusive', 'unspecified']).optional(),
        }),
        quantity: int(),
      }),
    )
    .min(1)
    .max(100),
  success_url: z.string().min(1).max(5000).optional(),
  cancel_url: url().optional(),
  client_reference_id: text(200).optional(),
  customer_email: email().optional(),
  custom_text: z.strictObject({ submit: z.strictObject({ message: text(1200) }).optional() }).optional(),
  expires_at: int().optional(),
  locale: text(10).optional(),
  metadata: metadata(),
  payment_intent_data: z
    .strictObject({
      capture_method: z.enum(['automatic', 'automatic_async']).optional(),
      description: text(1000).optional(),
      metadata: metadata(),
      receipt_email: email().optional(),
      statement_descriptor_suffix: text(22).optional(),
      transfer_group: text(200).optional(),
    })
    .optional(),
  submit_type: z.enum(['auto', 'pay', 'book', 'donate']).optional(),
  ui_mode: z.enum(['hosted_page', 'embedded_page', 'elements', 'form']).optional(),
  expand: expand(),
});
type CreateParams = z.output<typeof createSchema>;

function totalOf(params: CreateParams): { amount: number; currency: string } {
  const code = params.line_items[0]?.price_data.currency ?? '';
  let amount = 0;
  params.line_items.forEach((item, index) => {
    if (item.price_data.currency !== code) {
      throw invalidParam(
        undefined,
        'All line items must have the same currency.',
        `line_items[${String(index)}][price_data][currency]`,
      );
    }
    if (item.quantity < 1) {
      throw invalidParam(
        'parameter_invalid_integer',
        'This value must be greater than or equal to 1.',
        `line_items[${String(index)}][quantity]`,
      );
    }
    if (item.price_data.unit_amount < 0) {
      throw invalidParam(
        'parameter_invalid_integer',
        'This value must be greater than or equal to 0.',
        `line_items[${String(index)}][price_data][unit_amount]`,
      );
    }
    amount += item.quantity * item.price_data.unit_amount;
  });
  return { amount, currency: code };
}

function assertSupported(service: PaymentService, params: CreateParams): void {
  if (params.mode !== 'payment') {
    throw invalidParam(
      undefined,
      `This stand-in takes single payments only, not mode ${params.mode}.`,
      'mode',
    );
  }
  if ((params.ui_mode ?? 'hosted_page') !== 'hosted_page') {
    throw invalidParam(
      undefined,
      `This stand-in has hosted pages only, not ui_mode ${String(params.ui_mode)}.`,
      'ui_mode',
    );
  }
  if (params.success_url === undefined) {
    throw invalidParam('parameter_missing', 'Missing required param: success_url.', 'success_url');
  }
  if (!URL.canParse(params.success_url.replace('{CHECKOUT_SESSION_ID}', 'x'))) {
    throw invalidParam('url_invalid', 'Not a valid URL', 'success_url');
  }
  if (params.expires_at !== undefined) {
    const wait = params.expires_at - service.now();
    // A minute of grace for the way of the request, as clocks differ.
    if (wait < 29 * MINUTE) {
      throw invalidParam(
        undefined,
        'The `expires_at` timestamp must be at least 30 minutes from Checkout Session creation.',
        'expires_at',
      );
    }
    if (wait > 24 * HOUR + MINUTE) {
      throw invalidParam(
        undefined,
        'The `expires_at` timestamp must be less than 24 hours from Checkout Session creation.',
        'expires_at',
      );
    }
  }
}

function newSession(service: PaymentService, params: CreateParams): Stripe.Checkout.Session {
  const total = totalOf(params);
  assertChargeable(total.amount, total.currency, 'line_items');
  const id = service.store.id('cs_test', 58);
  return {
    id,
    object: 'checkout.session',
    adaptive_pricing: { enabled: false },
    after_expiration: null,
    allow_promotion_codes: null,
    allowed_payment_method_types: null,
    amount_subtotal: total.amount,
    amount_total: total.amount,
    automatic_tax: { enabled: false, liability: null, provider: null, status: null },
    billing_address_collection: null,
    cancel_url: params.cancel_url ?? null,
    client_reference_id: params.client_reference_id ?? null,
    client_secret: null,
    collected_information: null,
    consent: null,
    consent_collection: null,
    created: service.now(),
    currency: total.currency,
    currency_conversion: null,
    custom_fields: [],
    custom_text: {
      after_submit: null,
      shipping_address: null,
      submit: params.custom_text?.submit ?? null,
      terms_of_service_acceptance: null,
    },
    customer: null,
    customer_account: null,
    customer_creation: 'if_required',
    customer_details: null,
    customer_email: params.customer_email ?? null,
    discounts: null,
    expires_at: params.expires_at ?? service.now() + 24 * HOUR,
    integration_identifier: null,
    invoice: null,
    invoice_creation: null,
    livemode: false,
    locale: params.locale ?? null,
    managed_payments: null,
    metadata: mergeMetadata({}, params.metadata),
    mode: 'payment',
    origin_context: null,
    payment_intent: null,
    payment_link: null,
    payment_method_collection: 'if_required',
    payment_method_configuration_details: null,
    payment_method_options: null,
    payment_method_types: ['card', 'sepa_debit'],
    payment_status: 'unpaid',
    permissions: null,
    recovered_from: null,
    saved_payment_method_options: null,
    setup_intent: null,
    shipping_address_collection: null,
    shipping_cost: null,
    shipping_options: [],
    status: 'open',
    submit_type: params.submit_type ?? null,
    subscription: null,
    success_url: params.success_url ?? null,
    total_details: { amount_discount: 0, amount_shipping: null, amount_tax: 0 },
    ui_mode: 'hosted_page',
    url: `${service.publicUrl}/c/pay/${id}`,
    wallet_options: null,
  } satisfies Stripe.Checkout.Session;
}

function create(service: PaymentService, params: CreateParams): Stripe.Checkout.Session {
  assertSupported(service, params);
  const object = newSession(service, params);
  const intent = params.payment_intent_data;
  const record: SessionRecord = {
    object,
    lineItems: params.line_items.map((item) => ({
      description: item.price_data.product_data.name,
      detail: item.price_data.product_data.description ?? null,
      quantity: item.quantity,
      unitAmount: item.price_data.unit_amount,
    })),
    intent: {
      description: intent?.description ?? null,
      metadata: mergeMetadata({}, intent?.metadata),
      transferGroup: intent?.transfer_group ?? null,
      receiptEmail: intent?.receipt_email ?? params.customer_email ?? null,
      statementDescriptorSuffix: intent?.statement_descriptor_suffix ?? null,
    },
    submitMessage: params.custom_text?.submit?.message ?? null,
  };
  service.store.tables.sessions.put(object.id, record);
  return object;
}

export function findSession(service: PaymentService, id: string): SessionRecord {
  const record = service.store.tables.sessions.get(id);
  if (record === undefined) throw missing('checkout.session', id, 'session');
  return record;
}

function lineItems(record: SessionRecord): Stripe.LineItem[] {
  return record.lineItems.map((item, index) => ({
    id: `li_${String(index + 1)}_${record.object.id.slice(-16)}`,
    object: 'item' as const,
    adjustable_quantity: null,
    amount_discount: 0,
    amount_subtotal: item.quantity * item.unitAmount,
    amount_tax: 0,
    amount_total: item.quantity * item.unitAmount,
    currency: record.object.currency ?? 'eur',
    description: item.description,
    metadata: null,
    price: null,
    quantity: item.quantity,
  })) satisfies Stripe.LineItem[];
}

registerIncludable('checkout.session.line_items', (service, id) => {
  const data = lineItems(findSession(service, id));
  return { object: 'list', data, has_more: false, url: `/v1/checkout/sessions/${id}/line_items` };
});

export function expireSession(service: PaymentService, record: SessionRecord): void {
  record.object.status = 'expired';
  record.object.url = null;
  service.store.tables.sessions.put(record.object.id, record);
  const intent =
    typeof record.object.payment_intent === 'string'
      ? service.store.tables.intents.get(record.object.payment_intent)
      : undefined;
  if (intent !== undefined && intent.object.status !== 'succeeded') {
    intent.object.status = 'canceled';
    intent.object.canceled_at = service.now();
    intent.object.cancellation_reason = 'automatic';
    service.store.tables.intents.put(intent.object.id, intent);
    service.emit('payment_intent.canceled', intent.object);
  }
  service.emit('checkout.session.expired', record.object);
}

function intentOf(service: PaymentService, record: SessionRecord): IntentRecord {
  const session = record.object;
  if (typeof session.payment_intent === 'string') {
    const existing = service.store.tables.intents.get(session.payment_intent);
    if (existing !== undefined) return existing;
  }
  const intent = createIntent(service, {
    amount: session.amount_total ?? 0,
    currency: session.currency ?? 'eur',
    description: record.intent.description,
    metadata: record.intent.metadata,
    transferGroup: record.intent.transferGroup,
    receiptEmail: record.intent.receiptEmail,
    statementDescriptorSuffix: record.intent.statementDescriptorSuffix,
    session: session.id,
    types: session.payment_method_types,
  });
  session.payment_intent = intent.object.id;
  service.store.tables.sessions.put(session.id, record);
  return intent;
}

function finish(
  service: PaymentService,
  record: SessionRecord,
  result: AttemptResult,
  email: string | null,
): void {
  if (result !== 'succeeded' && result !== 'processing') return;
  const session = record.object;
  session.status = 'complete';
  session.payment_status = result === 'succeeded' ? 'paid' : 'unpaid';
  session.url = null;
  session.customer_details = {
    address: null,
    business_name: null,
    email: session.customer_email ?? email,
    individual_name: null,
    name: null,
    phone: null,
    tax_exempt: 'none',
    tax_ids: [],
  };
  service.store.tables.sessions.put(session.id, record);
  service.emit('checkout.session.completed', session);
}

/** Someone pressed pay on the hosted page. */
export function paySession(
  service: PaymentService,
  record: SessionRecord,
  card: CardBehaviour,
  email: string | null = null,
): AttemptResult {
  if (record.object.status !== 'open') throw refused(undefined, 'This payment page is closed.');
  const result = attemptPayment(service, intentOf(service, record), card, false);
  finish(service, record, result, email);
  return result;
}

/** The bank's confirmation page was answered. */
export function confirmSession(
  service: PaymentService,
  record: SessionRecord,
  approve: boolean,
): AttemptResult {
  const intent = intentOf(service, record);
  const card = intent.pendingCard;
  if (card === null || record.object.status !== 'open')
    throw refused(undefined, 'Nothing waits for confirmation.');
  if (!approve) {
    failAuthentication(service, intent);
    return 'declined';
  }
  const result = attemptPayment(service, intent, card, true);
  finish(service, record, result, null);
  return result;
}

export const checkoutRoutes = [
  route('POST', '/v1/checkout/sessions', createSchema, create),
  route(
    'GET',
    '/v1/checkout/sessions/:id',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => findSession(service, id).object,
  ),
  route(
    'POST',
    '/v1/checkout/sessions/:id',
    z.strictObject({ metadata: metadata(), expand: expand() }),
    (service, params, id) => {
      const record = findSession(service, id);
      record.object.metadata = mergeMetadata(record.object.metadata ?? {}, params.metadata);
      service.store.tables.sessions.put(id, record);
      return record.object;
    },
  ),
  route(
    'POST',
    '/v1/checkout/sessions/:id/expire',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => {
      const record = findSession(service, id);
      if (record.object.status !== 'open') {
        throw refused(
          undefined,
          `Only Checkout Sessions with a status in ["open"] can be expired. This Checkout Session has a status of ${String(record.object.status)}.`,
          'session',
        );
      }
      expireSession(service, record);
      return record.object;
    },
  ),
  route('GET', '/v1/checkout/sessions/:id/line_items', z.strictObject({ ...page }), (service, params, id) =>
    listPage(lineItems(findSession(service, id)).reverse(), params, `/v1/checkout/sessions/${id}/line_items`),
  ),
  route(
    'GET',
    '/v1/checkout/sessions',
    z.strictObject({
      ...page,
      created: range(),
      payment_intent: text().optional(),
      status: z.enum(['open', 'complete', 'expired']).optional(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.sessions
          .all()
          .map((row) => row.object)
          .filter(
            (session) =>
              (params.payment_intent === undefined || session.payment_intent === params.payment_intent) &&
              (params.status === undefined || session.status === params.status) &&
              inRange(session.created, params.created),
          ),
        params,
        '/v1/checkout/sessions',
      ),
  ),
];
