/**
 * Authentication, versions, parameters, lists and idempotency as documented at the API reference of the payment
 * service ("Authentication", "Errors", "Idempotent requests", "Expanding responses", "Metadata", "Pagination",
 * "Versioning"), recalled from memory, and as the SDK's own source expects them.
 */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  errorOf,
  newKey,
  pay,
  payee,
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

const intent = { amount: 1000, currency: 'eur' };

describe('a call', () => {
  it('is refused with a key that is not known', async () => {
    const error = await errorOf(contract.client({ apiKey: 'sk_test_wrong' }).balance.retrieve());
    expect(error).toMatchObject({ type: 'StripeAuthenticationError', statusCode: 401 });
  });

  standIn('is refused without a key', async () => {
    const response = await fetch(`${contract.url}/v1/balance`);
    expect(response.status).toBe(401);
  });

  standIn('takes the key as Bearer and as the user name of Basic', async () => {
    const basic = Buffer.from('sk_test_contract:').toString('base64');
    expect((await contract.raw('GET', '/v1/balance')).status).toBe(200);
    expect(
      (await contract.raw('GET', '/v1/balance', { headers: { authorization: `Basic ${basic}` } })).status,
    ).toBe(200);
  });

  it('answers with a request id and its version', async () => {
    const { lastResponse } = await contract.stripe.balance.retrieve();
    expect(lastResponse.requestId).toMatch(/^req_\w+$/);
    expect(lastResponse.apiVersion).toBe('2026-10-28.endive');
  });

  standIn('is refused in a version that is not spoken', async () => {
    const response = await contract.raw('GET', '/v1/balance', {
      headers: { 'stripe-version': '2020-08-27' },
    });
    expect(response.status).toBe(400);
  });

  standIn('needs a version for v2', async () => {
    expect((await contract.raw('GET', '/v2/core/accounts')).status).toBe(400);
  });

  standIn('to an address that does not exist is told so', async () => {
    const response = await contract.raw('GET', '/v1/coils');
    expect(response.status).toBe(404);
    expect(await response.json()).toMatchObject({ error: { type: 'invalid_request_error' } });
  });

  standIn('with a broken JSON body, broken brackets or keys of the prototype is refused', async () => {
    const version = { 'stripe-version': '2026-10-28.endive' };
    expect(
      (await contract.raw('POST', '/v2/core/accounts', { body: '{"a":', headers: version })).status,
    ).toBe(400);
    expect((await contract.raw('POST', '/v1/payment_intents', { body: 'amount]=1' })).status).toBe(400);
    expect(
      (await contract.raw('POST', '/v1/payment_intents', { body: 'metadata[__proto__]=1&amount=1' })).status,
    ).toBe(400);
    expect(
      (await contract.raw('POST', '/v1/payment_intents', { body: `description=${'x'.repeat(1_100_000)}` }))
        .status,
    ).toBe(413);
  });
});

describe('parameters', () => {
  it.each([
    ['payment_intents', { ...intent, colour: 'red' }, 'colour'],
    ['payment_intents', { ...intent, payment_method_types: ['card'] }, 'payment_method_types'],
    ['checkout/sessions', { ...sessionParams(), payment_method_types: ['card'] }, 'payment_method_types'],
    ['transfers', { amount: 1, currency: 'eur', destination: 'acct_x', fee: 1 }, 'fee'],
    ['refunds', { charge: 'ch_x', sum: 1 }, 'sum'],
  ])('of %s: unknown or removed ones are refused', async (path, params, name) => {
    const error = await errorOf(contract.stripe.rawRequest('POST', `/v1/${path}`, params));
    expect(error).toMatchObject({
      type: 'StripeInvalidRequestError',
      code: 'parameter_unknown',
      param: name,
      statusCode: 400,
    });
  });

  it('unknown ones deep inside are named by their path', async () => {
    const params = {
      ...sessionParams(),
      line_items: [
        {
          quantity: 1,
          price_data: { currency: 'eur', unit_amount: 500, product_data: { name: 'x', size: 3 } },
        },
      ],
    };
    const error = await errorOf(contract.stripe.rawRequest('POST', '/v1/checkout/sessions', params));
    expect(error).toMatchObject({
      code: 'parameter_unknown',
      param: 'line_items[0][price_data][product_data][size]',
    });
  });

  it.each([
    ['payment_intents', { amount: 1000 }, 'currency'],
    ['payment_intents', { currency: 'eur' }, 'amount'],
    ['transfers', { amount: 1000, currency: 'eur' }, 'destination'],
    ['checkout/sessions', { ...sessionParams(), success_url: undefined }, 'success_url'],
  ])('of %s: missing ones are named', async (path, params, name) => {
    const error = await errorOf(contract.stripe.rawRequest('POST', `/v1/${path}`, params));
    expect(error).toMatchObject({ code: 'parameter_missing', param: name });
  });

  it.each([['abc'], ['1.5'], ['1e3']])('amount %s is no integer', async (amount) => {
    const error = await errorOf(
      contract.stripe.rawRequest('POST', '/v1/payment_intents', { amount, currency: 'eur' }),
    );
    expect(error).toMatchObject({ code: 'parameter_invalid_integer', param: 'amount' });
  });

  it('empty texts, wrong addresses and wrong links are refused by code', async () => {
    expect(
      await errorOf(contract.stripe.paymentIntents.create({ ...intent, description: '' })),
    ).toMatchObject({ code: 'parameter_invalid_empty' });
    expect(
      await errorOf(contract.stripe.paymentIntents.create({ ...intent, receipt_email: 'nobody' })),
    ).toMatchObject({ code: 'email_invalid' });
    expect(
      await errorOf(
        contract.stripe.checkout.sessions.create(sessionParams(500, { success_url: 'not a link' })),
      ),
    ).toMatchObject({ code: 'url_invalid' });
  });

  it('amounts too small or too large are refused by code', async () => {
    expect(
      await errorOf(contract.stripe.paymentIntents.create({ amount: 49, currency: 'eur' })),
    ).toMatchObject({ code: 'amount_too_small' });
    expect(
      await errorOf(contract.stripe.paymentIntents.create({ amount: 100_000_000, currency: 'eur' })),
    ).toMatchObject({ code: 'amount_too_large' });
  });
});

describe('metadata', () => {
  it('is merged, unset by empty values, and cleared by an empty text', async () => {
    const { id } = await contract.stripe.paymentIntents.create({
      ...intent,
      metadata: { order: 'o1', milestone: 'm1' },
    });
    const update = (metadata: Record<string, string> | '') =>
      contract.stripe.paymentIntents.update(id, { metadata });
    expect((await update({ milestone: 'm2', extra: 'x' })).metadata).toEqual({
      order: 'o1',
      milestone: 'm2',
      extra: 'x',
    });
    expect((await update({ extra: '' })).metadata).toEqual({ order: 'o1', milestone: 'm2' });
    expect((await update('')).metadata).toEqual({});
  });

  it('has limits for keys, lengths and number', async () => {
    const make = (metadata: Record<string, string>) =>
      contract.stripe.paymentIntents.create({ ...intent, metadata });
    expect((await errorOf(make({ ['k'.repeat(41)]: 'v' }))).statusCode).toBe(400);
    expect((await errorOf(make({ k: 'v'.repeat(501) }))).statusCode).toBe(400);
    expect(
      (
        await errorOf(
          make(Object.fromEntries(Array.from({ length: 51 }, (_, at) => [`k${String(at)}`, 'v']))),
        )
      ).statusCode,
    ).toBe(400);
  });
});

describe('expanding', () => {
  it('puts objects in place of ids, several levels deep and inside lists', async () => {
    const charge = await pay(contract.stripe, 2000, 'pm_card_visa', { transfer_group: 'expand' });
    const one = await contract.stripe.charges.retrieve(charge.id, {
      expand: ['balance_transaction', 'payment_intent.latest_charge'],
    });
    expect(one.balance_transaction).toMatchObject({ object: 'balance_transaction', amount: 2000 });
    expect(one.payment_intent).toMatchObject({ object: 'payment_intent', latest_charge: { id: charge.id } });
    const list = await contract.stripe.charges.list({
      transfer_group: 'expand',
      expand: ['data.balance_transaction'],
    });
    expect(list.data[0]?.balance_transaction).toMatchObject({ object: 'balance_transaction' });
  });

  it('refuses what cannot be expanded and what is too deep', async () => {
    const charge = await pay(contract.stripe);
    expect(
      (await errorOf(contract.stripe.charges.retrieve(charge.id, { expand: ['amount'] }))).statusCode,
    ).toBeGreaterThanOrEqual(400);
    expect(
      (await errorOf(contract.stripe.charges.retrieve(charge.id, { expand: ['coil'] }))).statusCode,
    ).toBe(400);
    expect(
      (await errorOf(contract.stripe.charges.retrieve(charge.id, { expand: ['a.b.c.d.e'] }))).statusCode,
    ).toBe(400);
  });
});

describe('lists', () => {
  const group = `list-${String(Date.now())}`;
  beforeAll(async () => {
    for (let at = 0; at < 5; at += 1)
      await pay(contract.stripe, 1000 + at, 'pm_card_visa', { transfer_group: group });
  });
  const list = (params: object) => contract.stripe.charges.list({ transfer_group: group, ...params });

  it('come newest first, in pages that know whether there is more', async () => {
    const first = await list({ limit: 2 });
    expect(first.data.map((charge) => charge.amount)).toEqual([1004, 1003]);
    expect(first.has_more).toBe(true);
    const second = await list({ limit: 3, starting_after: first.data[1]?.id });
    expect(second.data.map((charge) => charge.amount)).toEqual([1002, 1001, 1000]);
    expect(second.has_more).toBe(false);
    const back = await list({ limit: 2, ending_before: second.data[0]?.id });
    expect(back.data.map((charge) => charge.amount)).toEqual([1004, 1003]);
  });

  it('can be walked to the end by the SDK', async () => {
    const amounts: number[] = [];
    for await (const charge of contract.stripe.charges.list({ transfer_group: group, limit: 2 }))
      amounts.push(charge.amount);
    expect(amounts).toEqual([1004, 1003, 1002, 1001, 1000]);
  });

  it('refuse limits outside 1 to 100, two cursors, and cursors that do not exist', async () => {
    expect((await errorOf(list({ limit: 0 }))).statusCode).toBe(400);
    expect((await errorOf(list({ limit: 101 }))).statusCode).toBe(400);
    expect((await errorOf(list({ starting_after: 'ch_x', ending_before: 'ch_y' }))).statusCode).toBe(400);
    expect(await errorOf(list({ starting_after: 'ch_x' }))).toMatchObject({ code: 'resource_missing' });
  });

  it('can be narrowed by time', async () => {
    const now = Math.floor(Date.now() / 1000);
    expect((await list({ created: { gte: now - 600, lt: now + 600 } })).data).toHaveLength(5);
    expect((await list({ created: { gt: now + 600 } })).data).toHaveLength(0);
  });
});

describe('an idempotency key', () => {
  it('gives the first result again', async () => {
    const idempotencyKey = newKey();
    const first = await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    const second = await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    expect(second.id).toBe(first.id);
    expect(second.lastResponse.headers['idempotent-replayed']).toBe('true');
    expect(first.lastResponse.headers['idempotent-replayed']).toBeUndefined();
  });

  it('is refused with other parameters', async () => {
    const idempotencyKey = newKey();
    await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    const error = await errorOf(
      contract.stripe.paymentIntents.create({ ...intent, amount: 2000 }, { idempotencyKey }),
    );
    expect(error).toMatchObject({
      type: 'StripeIdempotencyError',
      statusCode: 400,
      rawType: 'idempotency_error',
    });
  });

  it('is refused for another call', async () => {
    const idempotencyKey = newKey();
    await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    const error = await errorOf(
      contract.stripe.checkout.sessions.create(sessionParams(), { idempotencyKey }),
    );
    expect(error.type).toBe('StripeIdempotencyError');
  });

  standIn('in use by another call at the same moment is a conflict, and there is one object', async () => {
    const idempotencyKey = newKey();
    const metadata = { race: idempotencyKey };
    await contract.control('POST', 'latency', { ms: 60 });
    const both = await Promise.allSettled([
      contract.stripe.paymentIntents.create({ ...intent, metadata }, { idempotencyKey }),
      contract.stripe.paymentIntents.create({ ...intent, metadata }, { idempotencyKey }),
    ]);
    await contract.control('POST', 'latency', { ms: 0 });
    const refused = both.filter((one) => one.status === 'rejected').map((one) => one.reason as unknown);
    expect(refused).toMatchObject([{ statusCode: 409, code: 'idempotency_key_in_use' }]);
    const { data } = await contract.stripe.paymentIntents.list({ limit: 100 });
    expect(data.filter((one) => one.metadata['race'] === idempotencyKey)).toHaveLength(1);
  });

  it('is not used up by a call with wrong parameters', async () => {
    const idempotencyKey = newKey();
    await errorOf(contract.stripe.paymentIntents.create({ amount: 1, currency: 'eur' }, { idempotencyKey }));
    expect((await contract.stripe.paymentIntents.create(intent, { idempotencyKey })).status).toBe(
      'requires_payment_method',
    );
  });

  it('repeats a declined card', async () => {
    const idempotencyKey = newKey();
    const params = {
      ...intent,
      payment_method: 'pm_card_chargeDeclined',
      confirm: true,
      automatic_payment_methods: { enabled: true, allow_redirects: 'never' as const },
    };
    const first = await errorOf(contract.stripe.paymentIntents.create(params, { idempotencyKey }));
    const second = await errorOf(contract.stripe.paymentIntents.create(params, { idempotencyKey }));
    expect(second.charge).toBe(first.charge);
    expect(second.headers?.['idempotent-replayed']).toBe('true');
  });

  standIn('repeats a refusal for want of funds even after they have come', async () => {
    const idempotencyKey = newKey();
    const params = { amount: 900_000, currency: 'gbp', destination: await payee(contract) };
    expect(await errorOf(contract.stripe.transfers.create(params, { idempotencyKey }))).toMatchObject({
      code: 'balance_insufficient',
    });
    await contract.control('POST', 'balance', { amount: 1_000_000, currency: 'gbp' });
    expect(await errorOf(contract.stripe.transfers.create(params, { idempotencyKey }))).toMatchObject({
      code: 'balance_insufficient',
    });
    expect((await contract.stripe.transfers.create(params, { idempotencyKey: newKey() })).amount).toBe(
      900_000,
    );
  });

  standIn('repeats a 500 for ever in v1', async () => {
    const idempotencyKey = newKey();
    await contract.control('POST', 'faults', { kind: 'error-500', path: '/v1/payment_intents' });
    for (let at = 0; at < 3; at += 1) {
      const error = await errorOf(contract.stripe.paymentIntents.create(intent, { idempotencyKey }));
      expect(error).toMatchObject({ type: 'StripeAPIError', statusCode: 500 });
    }
    expect((await contract.stripe.paymentIntents.create(intent, { idempotencyKey: newKey() })).id).toMatch(
      /^pi_/,
    );
  });

  standIn('is forgotten after a day', async () => {
    const idempotencyKey = newKey();
    const first = await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    await contract.control('POST', 'clock', { advanceSeconds: 86_400 + 60 });
    const second = await contract.stripe.paymentIntents.create(intent, { idempotencyKey });
    expect(second.id).not.toBe(first.id);
  });

  standIn('of v2 repeats successes and lets failures be tried again', async () => {
    const idempotencyKey = newKey();
    await contract.control('POST', 'faults', { kind: 'error-500', path: '/v2/core/accounts' });
    const params = { display_name: 'Tallow Bend', contact_email: 'shop@tallow.example' };
    expect(
      (await errorOf(contract.stripe.v2.core.accounts.create(params, { idempotencyKey }))).statusCode,
    ).toBe(500);
    const first = await contract.stripe.v2.core.accounts.create(params, { idempotencyKey });
    const second = await contract.stripe.v2.core.accounts.create(params, { idempotencyKey });
    expect(second.id).toBe(first.id);
  });

  it('has at most 255 characters', async () => {
    const error = await errorOf(
      contract.stripe.paymentIntents.create(intent, { idempotencyKey: 'k'.repeat(256) }),
    );
    expect(error.statusCode).toBe(400);
  });
});
