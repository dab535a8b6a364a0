/** What the stand-in can be told to do wrong, how the SDK takes it, and that its state survives. */
import { appendFileSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { afterAll, beforeAll, beforeEach, describe, expect } from 'vitest';
import {
  errorOf,
  listener,
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
beforeEach(async () => {
  await contract.control('DELETE', 'faults');
});
afterAll(() => contract.close());

const intent = { amount: 1000, currency: 'eur' };
const create = (mark: string, idempotencyKey = newKey(), client = contract.stripe) =>
  client.paymentIntents.create({ ...intent, metadata: { mark } }, { idempotencyKey });
const marked = async (mark: string) =>
  (await contract.stripe.paymentIntents.list({ limit: 100 })).data.filter(
    (one) => one.metadata['mark'] === mark,
  ).length;
const order = (kind: string, more: object = {}) =>
  contract.control('POST', 'faults', { kind, method: 'POST', path: '/v1/payment_intents', ...more });

describe('trouble on order', () => {
  standIn.each([
    ['error-500', 0, { statusCode: 500, type: 'StripeAPIError' }],
    ['error-500-after-effect', 1, { statusCode: 500, type: 'StripeAPIError' }],
    ['unavailable-503', 0, { statusCode: 503, type: 'StripeAPIError' }],
    ['rate-limit-429', 0, { statusCode: 429, type: 'StripeRateLimitError', code: 'rate_limit' }],
    ['lock-timeout-429', 0, { statusCode: 429, code: 'lock_timeout' }],
    ['conflict-409', 0, { statusCode: 409, code: 'idempotency_key_in_use' }],
    ['cut-body', 1, { type: 'StripeConnectionError' }],
    ['hang-before-effect', 0, { type: 'StripeConnectionError' }],
    ['hang-after-effect', 1, { type: 'StripeConnectionError' }],
  ])('%s leaves %i objects behind and is told to the caller', async (kind, objects, told) => {
    const mark = newKey();
    await order(kind);
    expect(await errorOf(create(mark, newKey(), contract.client({ timeout: 200 })))).toMatchObject(told);
    expect(await marked(mark)).toBe(objects);
  });

  standIn.each([
    ['cut-before-effect', 0],
    ['cut-after-effect', 1],
  ])('%s leaves %i objects behind', async (kind, objects) => {
    const mark = newKey();
    // The SDK tries once more by itself after a cut connection, so the trouble has to last.
    await order(kind, { times: 2 });
    expect(await errorOf(create(mark))).toMatchObject({ type: 'StripeConnectionError' });
    expect(await marked(mark)).toBe(objects);
  });

  standIn.each([
    ['cut-after-effect'],
    ['hang-after-effect'],
    ['cut-body'],
    ['error-500'],
    ['rate-limit-429'],
    ['delay'],
  ])('after %s the same key finishes the work exactly once', async (kind) => {
    const mark = newKey();
    const idempotencyKey = newKey();
    await order(kind, { times: kind === 'cut-after-effect' ? 2 : 1, delayMs: 20 });
    const first = await create(mark, idempotencyKey, contract.client({ timeout: 200 })).catch(
      (error: unknown) => error,
    );
    const second = await create(mark, idempotencyKey).catch((error: unknown) => error);
    // v1 keeps a 500 for its key; everything else comes to one object.
    const stuck = kind === 'error-500';
    expect(await marked(mark)).toBe(stuck ? 0 : 1);
    expect(second instanceof Error).toBe(stuck);
    expect(first instanceof Error).toBe(kind !== 'delay');
  });

  standIn('a retrying client gets through what passes', async () => {
    const mark = newKey();
    await order('unavailable-503', { times: 2 });
    const made = await create(mark, newKey(), contract.client({ maxNetworkRetries: 3 }));
    expect(made.id).toMatch(/^pi_/);
    expect(await marked(mark)).toBe(1);
  });

  standIn('hits only what it names, and as often as it says', async () => {
    await order('error-500', { times: 2 });
    expect((await contract.stripe.balance.retrieve()).object).toBe('balance');
    expect((await errorOf(create('a'))).statusCode).toBe(500);
    expect((await errorOf(create('b'))).statusCode).toBe(500);
    expect((await create('c')).object).toBe('payment_intent');
  });

  standIn('an outage refuses every call until it is over', async () => {
    await contract.control('POST', 'outage', { on: true });
    expect(await errorOf(create('down'))).toMatchObject({ type: 'StripeConnectionError' });
    await contract.control('POST', 'outage', { on: false });
    expect((await create('up')).object).toBe('payment_intent');
  });

  standIn('a slow service is a time-out for an impatient client, and the work is done', async () => {
    const mark = newKey();
    await contract.control('POST', 'latency', { ms: 150 });
    expect(await errorOf(create(mark, newKey(), contract.client({ timeout: 50 })))).toMatchObject({
      type: 'StripeConnectionError',
    });
    await contract.control('POST', 'latency', { ms: 0 });
    await new Promise((resolve) => setTimeout(resolve, 200));
    expect(await marked(mark)).toBe(1);
  });

  standIn('is refused when it is not understood, and calls are on record', async () => {
    await expect(contract.control('POST', 'faults', { kind: 'earthquake' })).rejects.toThrow();
    await expect(contract.control('GET', 'weather')).rejects.toThrow();
    const idempotencyKey = newKey();
    await create('recorded', idempotencyKey);
    const { data } = await contract.control('GET', 'requests');
    expect((data as object[]).at(-1)).toMatchObject({
      method: 'POST',
      path: '/v1/payment_intents',
      status: 200,
      idempotencyKey,
      replayed: false,
    });
  });
});

describe('the state', () => {
  standIn('survives a restart: objects, balance, keys, clock, endpoints and waiting webhooks', async () => {
    const hook = await listener();
    const endpoint = await contract.stripe.webhookEndpoints.create({
      url: hook.url,
      enabled_events: ['charge.succeeded'],
    });
    await contract.control('POST', 'webhooks', { paused: true });
    await contract.control('POST', 'clock', { offsetSeconds: 5000 });
    const idempotencyKey = newKey();
    const charge = await pay(contract.stripe, 7000, 'pm_card_visa', { transfer_group: 'kept' });
    const account = await payee(contract);
    const transfer = await contract.stripe.transfers.create(
      { amount: 100, currency: 'eur', destination: account, source_transaction: charge.id },
      { idempotencyKey },
    );
    const session = await contract.stripe.checkout.sessions.create(sessionParams());
    const before = { ...(await contract.stripe.balance.retrieve()) };

    await contract.restart();

    expect({ ...(await contract.stripe.balance.retrieve()) }).toEqual(before);
    expect((await contract.stripe.charges.retrieve(charge.id)).transfer_group).toBe('kept');
    expect((await contract.stripe.checkout.sessions.retrieve(session.id)).status).toBe('open');
    expect((await contract.control('GET', 'clock'))['offsetSeconds']).toBe(5000);
    const again = await contract.stripe.transfers.create(
      { amount: 100, currency: 'eur', destination: account, source_transaction: charge.id },
      { idempotencyKey },
    );
    expect(again.id).toBe(transfer.id);
    const [event] = await hook.until(1);
    expect(
      contract.stripe.webhooks.constructEvent(
        event?.body ?? '',
        event?.signature ?? '',
        endpoint.secret ?? '',
      ).data.object,
    ).toMatchObject({ id: charge.id });
    const ids = new Set([charge.id, (await pay(contract.stripe)).id]);
    expect(ids.size).toBe(2);
    await contract.stripe.webhookEndpoints.del(endpoint.id);
    await contract.control('POST', 'clock', { offsetSeconds: 0 });
    await hook.close();
  });

  standIn('survives being killed in the middle of a line', async () => {
    const charge = await pay(contract.stripe, 7100);
    const journal = path.join(contract.dataDir, 'payments.jsonl');
    appendFileSync(journal, '\n[["charges","ch_torn",{"object":{"id":"ch_to');
    await contract.restart();
    expect((await contract.stripe.charges.retrieve(charge.id)).amount).toBe(7100);
    expect((await errorOf(contract.stripe.charges.retrieve('ch_torn'))).code).toBe('resource_missing');
    const next = await pay(contract.stripe, 7200);
    await contract.restart();
    expect((await contract.stripe.charges.retrieve(next.id)).amount).toBe(7200);
  });

  standIn('is on disk before the answer leaves', async () => {
    const charge = await pay(contract.stripe, 7300);
    expect(readFileSync(path.join(contract.dataDir, 'payments.jsonl'), 'utf8')).toContain(charge.id);
  });

  standIn('repeats its ids for the same seed, and has others for another', async () => {
    const first = async (seed: string) => {
      const fresh = await startContract({ seed });
      const { id } = await fresh.stripe.paymentIntents.create(intent);
      await fresh.close();
      return id;
    };
    const [one, same, other] = [await first('a'), await first('a'), await first('b')];
    expect(one).toBe(same);
    expect(other).not.toBe(one);
  });

  standIn('can be emptied', async () => {
    await pay(contract.stripe);
    await contract.control('POST', 'reset', {});
    expect((await contract.stripe.charges.list()).data).toEqual([]);
    expect((await contract.stripe.balance.retrieve()).available).toEqual([
      { amount: 0, currency: 'eur', source_types: { card: 0 } },
    ]);
    await contract.restart();
    expect((await contract.stripe.charges.list()).data).toEqual([]);
  });
});
