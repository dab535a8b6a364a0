/**
 * Checkout sessions and payment intents as documented ("Checkout Sessions", "The PaymentIntent lifecycle",
 * "Testing": test numbers and decline codes), recalled from memory.
 */
import type { Stripe } from 'stripe';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  errorOf,
  eventually,
  newKey,
  pay,
  payOnPage,
  sessionParams,
  standIn,
  startContract,
  type Contract,
} from '../../support/payments.ts';

let contract: Contract;
beforeAll(async () => {
  contract = await startContract();
});
afterAll(() => contract.close());

const create = (amount?: number, extra: Partial<Stripe.Checkout.SessionCreateParams> = {}) =>
  contract.stripe.checkout.sessions.create(sessionParams(amount, extra));
const look = (id: string) =>
  contract.stripe.checkout.sessions.retrieve(id, { expand: ['payment_intent.latest_charge'] });
const intentOf = (session: Stripe.Checkout.Session): Stripe.PaymentIntent => {
  if (session.payment_intent === null || typeof session.payment_intent === 'string')
    throw new Error('not expanded');
  return session.payment_intent;
};
const pageOf = (session: Stripe.Checkout.Session) => session.url ?? '';
const now = () => Math.floor(Date.now() / 1000);

describe('a new session', () => {
  it('is open, unpaid, has a page and no payment yet', async () => {
    const session = await create(120_000, { client_reference_id: 'milestone-7', metadata: { order: 'o1' } });
    expect(session).toMatchObject({
      object: 'checkout.session',
      status: 'open',
      payment_status: 'unpaid',
      amount_total: 120_000,
      currency: 'eur',
      client_reference_id: 'milestone-7',
      payment_intent: null,
      ui_mode: 'hosted_page',
      metadata: { order: 'o1' },
    });
    expect(session.url).toMatch(/^https?:\/\//);
    expect(session.expires_at - session.created).toBe(24 * 3600);
  });

  it('adds up its lines and lists them in order', async () => {
    const price = (unit_amount: number, name: string) => ({
      currency: 'eur',
      unit_amount,
      product_data: { name },
    });
    const session = await create(0, {
      line_items: [
        { quantity: 3, price_data: price(1250, 'Coil') },
        { quantity: 1, price_data: price(99, 'Freight') },
      ],
    });
    expect(session.amount_total).toBe(3849);
    const lines = await contract.stripe.checkout.sessions.listLineItems(session.id);
    expect(lines.data.map((line) => [line.description, line.quantity, line.amount_total])).toEqual([
      ['Coil', 3, 3750],
      ['Freight', 1, 99],
    ]);
    const expanded = await contract.stripe.checkout.sessions.retrieve(session.id, { expand: ['line_items'] });
    expect(expanded.line_items?.data).toHaveLength(2);
  });

  it.each([
    [
      'mixed currencies',
      {
        line_items: [
          { quantity: 1, price_data: { currency: 'eur', unit_amount: 500, product_data: { name: 'a' } } },
          { quantity: 1, price_data: { currency: 'usd', unit_amount: 500, product_data: { name: 'b' } } },
        ],
      },
    ],
    [
      'a quantity of nothing',
      {
        line_items: [
          { quantity: 0, price_data: { currency: 'eur', unit_amount: 500, product_data: { name: 'a' } } },
        ],
      },
    ],
    [
      'a negative amount',
      {
        line_items: [
          { quantity: 1, price_data: { currency: 'eur', unit_amount: -500, product_data: { name: 'a' } } },
        ],
      },
    ],
    ['no lines', { line_items: [] }],
    ['an end in less than half an hour', { expires_at: now() + 600 }],
    ['an end in more than a day', { expires_at: now() + 2 * 86_400 }],
  ])('is refused with %s', async (_what, extra) => {
    const error = await errorOf(create(1000, extra));
    expect(error).toMatchObject({ type: 'StripeInvalidRequestError', statusCode: 400 });
  });

  standIn('is refused in modes the stand-in does not play', async () => {
    expect((await errorOf(create(1000, { mode: 'setup' }))).param).toBe('mode');
    expect((await errorOf(create(1000, { ui_mode: 'embedded_page' }))).param).toBe('ui_mode');
  });

  it('that does not exist is missing', async () => {
    expect(await errorOf(contract.stripe.checkout.sessions.retrieve('cs_test_none'))).toMatchObject({
      code: 'resource_missing',
      statusCode: 404,
    });
  });
});

describe('paying on the page', () => {
  standIn('completes the session and sends the buyer back', async () => {
    const session = await create(120_000, {
      metadata: { order: 'o1' },
      payment_intent_data: { metadata: { order: 'o1', milestone: 'm1' }, transfer_group: 'order-1' },
    });
    const answer = await payOnPage(pageOf(session));
    expect(answer.status).toBe(303);
    expect(answer.headers.get('location')).toBe(`http://localhost:3000/paid?session=${session.id}`);
    const paid = await look(session.id);
    expect(paid).toMatchObject({ status: 'complete', payment_status: 'paid', url: null });
    expect(intentOf(paid)).toMatchObject({
      status: 'succeeded',
      amount_received: 120_000,
      transfer_group: 'order-1',
      metadata: { milestone: 'm1' },
      latest_charge: {
        paid: true,
        captured: true,
        amount: 120_000,
        transfer_group: 'order-1',
        metadata: { milestone: 'm1' },
      },
    });
  });

  standIn.each([
    ['4000 0000 0000 0002', 'card_declined', 'generic_decline'],
    ['4000 0000 0000 9995', 'card_declined', 'insufficient_funds'],
    ['4000 0000 0000 9987', 'card_declined', 'lost_card'],
    ['4000 0000 0000 9979', 'card_declined', 'stolen_card'],
    ['4000 0000 0000 6975', 'card_declined', 'card_velocity_exceeded'],
    ['4100 0000 0000 0019', 'card_declined', 'fraudulent'],
    ['4000 0000 0000 0069', 'expired_card', undefined],
    ['4000 0000 0000 0127', 'incorrect_cvc', undefined],
    ['4000 0000 0000 0119', 'processing_error', undefined],
  ])('with %s leaves the session open, with %s (%s) told', async (card, code, declineCode) => {
    const session = await create(5000);
    const answer = await payOnPage(pageOf(session), { card });
    expect(answer.status).toBe(402);
    expect(await answer.text()).toContain('role="alert"');
    const after = await look(session.id);
    expect(after).toMatchObject({ status: 'open', payment_status: 'unpaid' });
    expect(intentOf(after)).toMatchObject({
      status: 'requires_payment_method',
      last_payment_error: { code },
      latest_charge: { status: 'failed', paid: false },
    });
    expect(intentOf(after).last_payment_error?.decline_code).toBe(declineCode);
  });

  standIn('works with another card after one was declined, in the same payment', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session), { card: '4000000000000002' });
    const declined = intentOf(await look(session.id)).id;
    expect((await payOnPage(pageOf(session))).status).toBe(303);
    const paid = await look(session.id);
    expect(intentOf(paid).id).toBe(declined);
    const charges = await contract.stripe.charges.list({ payment_intent: declined });
    expect(charges.data.map((charge) => charge.status)).toEqual(['succeeded', 'failed']);
  });

  standIn.each([
    ['card number', { card: '4242 4242 4242 4241' }],
    ['number that is no test number', { card: '4539 1488 0343 6467' }],
    ['expiry in the past', { expiry: '01/20' }],
    ['month', { expiry: '13/34' }],
    ['security code', { cvc: '1' }],
    ['IBAN', { card: '', iban: 'DE00 1234' }],
    ['way to pay at all', { card: '' }],
  ])('with a wrong %s charges nothing and keeps what was typed', async (_what, fields) => {
    const session = await create(5000);
    const answer = await payOnPage(pageOf(session), { email: 'buyer@millrace.example', ...fields });
    expect(answer.status).toBe(400);
    const html = await answer.text();
    expect(html).toContain('role="alert"');
    expect(html).toContain('buyer@millrace.example');
    expect((await look(session.id)).payment_intent).toBeNull();
  });

  standIn('asks the bank first where the card wants it', async () => {
    const session = await create(5000);
    const answer = await payOnPage(pageOf(session), { card: '4000 0027 6000 3184' });
    const confirmation = new URL(answer.headers.get('location') ?? '', contract.url).href;
    expect(intentOf(await look(session.id))).toMatchObject({
      status: 'requires_action',
      next_action: { type: 'redirect_to_url' },
    });
    expect(await (await fetch(confirmation)).text()).toContain('Confirm with your bank');
    const approved = await fetch(confirmation, {
      method: 'POST',
      redirect: 'manual',
      body: new URLSearchParams({ answer: 'approve' }),
    });
    expect(approved.headers.get('location')).toContain('/paid?session=');
    expect((await look(session.id)).payment_status).toBe('paid');
    expect((await fetch(confirmation)).status).toBe(404);
  });

  standIn(
    'stays open when the bank’s question is denied, and when the bank declines afterwards',
    async () => {
      for (const [card, answer, code] of [
        ['4000002760003184', 'deny', 'payment_intent_authentication_failure'],
        ['4000008400001629', 'approve', 'card_declined'],
      ] as const) {
        const session = await create(5000);
        const first = await payOnPage(pageOf(session), { card });
        const confirmation = new URL(first.headers.get('location') ?? '', contract.url).href;
        expect(
          (await fetch(confirmation, { method: 'POST', body: new URLSearchParams({ answer }) })).status,
        ).toBe(402);
        const after = await look(session.id);
        expect(after.status).toBe('open');
        expect(intentOf(after).last_payment_error?.code).toBe(code);
      }
    },
  );

  standIn('by bank debit completes unpaid, and is paid when the debit settles', async () => {
    const session = await create(5000);
    expect((await payOnPage(pageOf(session), { card: '', iban: 'AT32 1904 3002 3547 3204' })).status).toBe(
      303,
    );
    expect(await look(session.id)).toMatchObject({
      status: 'complete',
      payment_status: 'unpaid',
      payment_intent: { status: 'processing', latest_charge: { status: 'pending', paid: false } },
    });
    await contract.control('POST', 'clock', { advanceSeconds: 200 });
    expect(await look(session.id)).toMatchObject({
      payment_status: 'paid',
      payment_intent: { status: 'succeeded' },
    });
  });

  standIn('by a bank debit that fails stays complete and unpaid', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session), { card: '', iban: 'DE62370400440532013001' });
    await contract.control('POST', 'clock', { advanceSeconds: 10 });
    const after = await eventually(
      () => look(session.id),
      (value) => intentOf(value).status === 'requires_payment_method',
    );
    expect(after).toMatchObject({
      status: 'complete',
      payment_status: 'unpaid',
      payment_intent: { latest_charge: { status: 'failed' } },
    });
    const events = await contract.stripe.events.list({ type: 'checkout.session.async_payment_failed' });
    expect(events.data[0]?.data.object).toMatchObject({ id: session.id });
  });

  standIn('cannot be done twice', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session));
    const again = await payOnPage(pageOf(session));
    expect(again.status).toBe(200);
    expect(await again.text()).toContain('has been made');
    const intent = intentOf(await look(session.id));
    expect((await contract.stripe.charges.list({ payment_intent: intent.id })).data).toHaveLength(1);
  });
});

describe('the page', () => {
  standIn('shows amount, lines and the way back, escapes texts and carries strict headers', async () => {
    const session = await create(0, {
      line_items: [
        {
          quantity: 2,
          price_data: {
            currency: 'eur',
            unit_amount: 61_725,
            product_data: { name: '<b>Coil</b>', description: 'Ø 28 mm' },
          },
        },
      ],
      customer_email: 'buyer@millrace.example',
    });
    const response = await fetch(pageOf(session));
    const html = await response.text();
    expect(html).toContain('€1,234.50');
    expect(html).toContain('&lt;b&gt;Coil&lt;/b&gt; × 2');
    expect(html).toContain('href="http://localhost:3000/back"');
    expect(html).toContain('value="buyer@millrace.example"');
    expect(html).not.toContain('<script');
    expect(response.headers.get('content-security-policy')).toContain("default-src 'none'");
    expect(response.headers.get('cache-control')).toBe('no-store');
  });

  standIn('that does not exist says so', async () => {
    expect((await fetch(`${contract.url}/c/pay/cs_test_none`)).status).toBe(404);
  });
});

describe('an open session', () => {
  standIn('can be expired once; then nothing can be paid', async () => {
    const session = await create(5000);
    const expired = await contract.stripe.checkout.sessions.expire(
      session.id,
      {},
      { idempotencyKey: newKey() },
    );
    expect(expired).toMatchObject({ status: 'expired', url: null });
    expect((await errorOf(contract.stripe.checkout.sessions.expire(session.id))).statusCode).toBe(400);
    expect(await (await payOnPage(pageOf(session))).text()).toContain('has expired');
    expect((await look(session.id)).payment_intent).toBeNull();
  });

  standIn('that was paid cannot be expired', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session));
    expect((await errorOf(contract.stripe.checkout.sessions.expire(session.id))).statusCode).toBe(400);
    expect((await look(session.id)).payment_status).toBe('paid');
  });

  standIn('expires by itself when its time is over, with its payment cancelled', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session), { card: '4000000000000002' });
    await contract.control('POST', 'clock', { advanceSeconds: 24 * 3600 + 1 });
    expect(await look(session.id)).toMatchObject({
      status: 'expired',
      payment_intent: { status: 'canceled' },
    });
    const events = await contract.stripe.events.list({ type: 'checkout.session.expired' });
    expect(events.data[0]?.data.object).toMatchObject({ id: session.id });
  });

  standIn('owns its payment: it cannot be confirmed or cancelled apart from it', async () => {
    const session = await create(5000);
    await payOnPage(pageOf(session), { card: '4000000000000002' });
    const { id } = intentOf(await look(session.id));
    expect((await errorOf(contract.stripe.paymentIntents.cancel(id))).code).toBe(
      'payment_intent_unexpected_state',
    );
    expect(
      (await errorOf(contract.stripe.paymentIntents.confirm(id, { payment_method: 'pm_card_visa' }))).code,
    ).toBe('payment_intent_unexpected_state');
  });

  it('can be found by its payment and its status', async () => {
    const session = await create(5000);
    const open = await contract.stripe.checkout.sessions.list({ status: 'open', limit: 100 });
    expect(open.data.map((one) => one.id)).toContain(session.id);
  });
});

describe('a payment intent', () => {
  it('runs from creation to success', async () => {
    const intent = await contract.stripe.paymentIntents.create({
      amount: 2500,
      currency: 'eur',
      automatic_payment_methods: { enabled: true, allow_redirects: 'never' },
    });
    expect(intent.status).toBe('requires_payment_method');
    const paid = await contract.stripe.paymentIntents.confirm(intent.id, { payment_method: 'pm_card_visa' });
    expect(paid).toMatchObject({ status: 'succeeded', amount_received: 2500 });
    expect((await contract.stripe.paymentIntents.retrieve(intent.id)).status).toBe('succeeded');
  });

  it('with a declined card throws a card error that names code, charge and payment', async () => {
    const error = await errorOf(pay(contract.stripe, 2500, 'pm_card_chargeDeclinedInsufficientFunds'));
    expect(error).toMatchObject({
      type: 'StripeCardError',
      statusCode: 402,
      code: 'card_declined',
      decline_code: 'insufficient_funds',
      payment_intent: { status: 'requires_payment_method' },
    });
    expect(error.charge).toMatch(/^ch_/);
  });

  it('cannot be confirmed without a card, with an unknown one, or twice', async () => {
    const intent = await contract.stripe.paymentIntents.create({
      amount: 2500,
      currency: 'eur',
      automatic_payment_methods: { enabled: true, allow_redirects: 'never' },
    });
    expect((await errorOf(contract.stripe.paymentIntents.confirm(intent.id))).statusCode).toBe(400);
    expect(
      (await errorOf(contract.stripe.paymentIntents.confirm(intent.id, { payment_method: 'pm_card_none' })))
        .code,
    ).toBe('resource_missing');
    await contract.stripe.paymentIntents.confirm(intent.id, { payment_method: 'pm_card_visa' });
    expect(
      (await errorOf(contract.stripe.paymentIntents.confirm(intent.id, { payment_method: 'pm_card_visa' })))
        .code,
    ).toBe('payment_intent_unexpected_state');
  });

  it('can be cancelled before, not after it succeeded', async () => {
    const intent = await contract.stripe.paymentIntents.create({ amount: 2500, currency: 'eur' });
    const canceled = await contract.stripe.paymentIntents.cancel(intent.id, {
      cancellation_reason: 'abandoned',
    });
    expect(canceled).toMatchObject({ status: 'canceled', cancellation_reason: 'abandoned' });
    const charge = await pay(contract.stripe);
    expect((await errorOf(contract.stripe.paymentIntents.cancel(String(charge.payment_intent)))).code).toBe(
      'payment_intent_unexpected_state',
    );
  });
});
