/** Making a session: what is taken, what is refused, and what the service answers. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam } from '../core/errors.ts';
import { assertChargeable } from '../core/money.ts';
import { currency, email, expand, int, mergeMetadata, metadata, text, url } from '../core/params.ts';
import type { SessionRecord } from '../core/records.ts';
import type { PaymentService } from '../core/service.ts';

const MINUTE = 60;
const HOUR = 3600;

export const createSchema = z.strictObject({
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

export function createSession(service: PaymentService, params: CreateParams): Stripe.Checkout.Session {
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
