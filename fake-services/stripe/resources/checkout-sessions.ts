/** Hosted payment pages: a session per payment, paid on a page of the stand-in's own design. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import type { CardBehaviour } from '../cards.ts';
import { missing, refused } from '../core/errors.ts';
import { registerIncludable } from '../core/expand.ts';
import { inRange, listPage } from '../core/listing.ts';
import { expand, mergeMetadata, metadata, page, range, text } from '../core/params.ts';
import type { IntentRecord, SessionRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { createSchema, createSession } from './checkout-create.ts';
import { attemptPayment, createIntent, failAuthentication, type AttemptResult } from './payments.ts';

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
  route('POST', '/v1/checkout/sessions', createSchema, createSession),
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
