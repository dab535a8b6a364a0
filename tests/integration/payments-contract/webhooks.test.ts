/**
 * Snapshot events and webhooks as documented ("Receive events in your webhook endpoint", "Event object"), recalled
 * from memory; signatures are checked by the SDK.
 */
import type { Stripe } from 'stripe';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
  errorOf,
  eventually,
  listener,
  pay,
  payee,
  payOnPage,
  sessionParams,
  standIn,
  startContract,
  type Contract,
  type Listener,
} from '../../support/payments.ts';

let contract: Contract;
let hook: Listener;
let endpoint: Stripe.WebhookEndpoint;

beforeAll(async () => {
  contract = await startContract({ webhookRetryMs: [30] });
});
afterAll(() => contract.close());

const register = (enabled_events: Stripe.WebhookEndpointCreateParams.EnabledEvent[]) =>
  contract.stripe.webhookEndpoints.create({ url: hook.url, enabled_events });
const types = () => hook.received.map((one) => one.type);
const verify = (at = 0, secret = endpoint.secret ?? '', tolerance?: number) =>
  contract.stripe.webhooks.constructEvent(
    hook.received[at]?.body ?? '',
    hook.received[at]?.signature ?? '',
    secret,
    tolerance,
  );
const deliveries = async () =>
  (await contract.control('GET', 'deliveries'))['data'] as {
    eventId: string;
    state: string;
    attempts: number;
    targetId: string;
  }[];

describe('a webhook endpoint', () => {
  beforeEach(async () => {
    hook = await listener();
  });
  afterEach(() => hook.close());

  it('tells its secret once', async () => {
    const made = await register(['charge.succeeded']);
    expect(made.secret).toMatch(/^whsec_/);
    const read = await contract.stripe.webhookEndpoints.retrieve(made.id);
    expect(read).toMatchObject({ url: hook.url, status: 'enabled', enabled_events: ['charge.succeeded'] });
    expect(read.secret).toBeUndefined();
    await contract.stripe.webhookEndpoints.del(made.id);
  });

  it('can be changed, listed and removed', async () => {
    const { id } = await register(['charge.succeeded']);
    const changed = await contract.stripe.webhookEndpoints.update(id, {
      enabled_events: ['*'],
      disabled: true,
      url: `${hook.url}/new`,
    });
    expect(changed).toMatchObject({ enabled_events: ['*'], status: 'disabled', url: `${hook.url}/new` });
    expect((await contract.stripe.webhookEndpoints.list({ limit: 100 })).data.map((one) => one.id)).toContain(
      id,
    );
    expect(await contract.stripe.webhookEndpoints.del(id)).toMatchObject({ deleted: true });
    expect((await errorOf(contract.stripe.webhookEndpoints.retrieve(id))).code).toBe('resource_missing');
  });

  standIn('that is disabled gets nothing', async () => {
    const { id } = await register(['*']);
    await contract.stripe.webhookEndpoints.update(id, { disabled: true });
    await pay(contract.stripe);
    await contract.control('POST', 'webhooks/flush');
    expect(hook.received).toEqual([]);
    await contract.stripe.webhookEndpoints.del(id);
  });
});

describe('a delivery', () => {
  beforeEach(async () => {
    hook = await listener();
    endpoint = await register([
      'charge.succeeded',
      'checkout.session.completed',
      'transfer.created',
      'refund.created',
      'charge.dispute.created',
    ]);
  });
  afterEach(async () => {
    await contract.control('POST', 'webhooks', {
      paused: false,
      drop: 0,
      duplicate: 0,
      delayMs: 0,
      shuffle: false,
    });
    await contract.stripe.webhookEndpoints.del(endpoint.id);
    await hook.close();
  });

  standIn('is signed so that the SDK takes it, and carries the object as it was', async () => {
    const charge = await pay(contract.stripe, 4321, 'pm_card_visa', { metadata: { milestone: 'm1' } });
    await hook.until(1);
    const event = verify();
    expect(event).toMatchObject({
      object: 'event',
      type: 'charge.succeeded',
      api_version: '2026-10-28.endive',
      livemode: false,
    });
    expect(event.data.object).toMatchObject({ id: charge.id, amount: 4321, metadata: { milestone: 'm1' } });
    expect(event.request?.id).toMatch(/^req_/);
  });

  standIn('is refused by the SDK under another secret, with another body, or when it is old', async () => {
    await pay(contract.stripe);
    await hook.until(1);
    expect(() => verify(0, 'whsec_other')).toThrow('signature');
    const { body, signature } = hook.received[0] ?? { body: '', signature: '' };
    expect(() =>
      contract.stripe.webhooks.constructEvent(
        body.replace('"amount": 10000', '"amount": 1'),
        signature,
        endpoint.secret ?? '',
      ),
    ).toThrow();
    const old = contract.stripe.webhooks.generateTestHeaderString({
      payload: body,
      secret: endpoint.secret ?? '',
      timestamp: Math.floor(Date.now() / 1000) - 400,
    });
    expect(() => contract.stripe.webhooks.constructEvent(body, old, endpoint.secret ?? '', 300)).toThrow(
      'Timestamp',
    );
  });

  standIn('carries real time in its signature even when the service’s clock is moved', async () => {
    await contract.control('POST', 'clock', { advanceSeconds: 40 * 86_400 });
    await pay(contract.stripe);
    await hook.until(1);
    expect(verify(0, endpoint.secret ?? '', 300).type).toBe('charge.succeeded');
    await contract.control('POST', 'clock', { offsetSeconds: 0 });
  });

  standIn('comes only for the types that were asked for', async () => {
    const charge = await pay(contract.stripe);
    await contract.stripe.transfers.create({
      amount: 100,
      currency: 'eur',
      destination: await payee(contract),
      source_transaction: charge.id,
    });
    await contract.stripe.refunds.create({ charge: charge.id, amount: 50 });
    const session = await contract.stripe.checkout.sessions.create(sessionParams());
    await payOnPage(session.url ?? '');
    await hook.until(5);
    expect(types().sort()).toEqual([
      'charge.succeeded',
      'charge.succeeded',
      'checkout.session.completed',
      'refund.created',
      'transfer.created',
    ]);
  });

  standIn('is tried again until it is taken', async () => {
    hook.answers.splice(0, 1, 500, 503, 302, 200);
    await pay(contract.stripe);
    await hook.until(4);
    expect(
      new Set(hook.received.map((one) => JSON.parse(one.body) as { id: string }).map((one) => one.id)).size,
    ).toBe(1);
    const states = await eventually(deliveries, (all) =>
      all.some((one) => one.targetId === endpoint.id && one.state === 'delivered'),
    );
    expect(states.find((one) => one.targetId === endpoint.id)).toMatchObject({ attempts: 4 });
  });

  standIn('waits while the endpoint is down, and the event tells what is outstanding', async () => {
    const { id } = endpoint;
    await contract.stripe.webhookEndpoints.update(id, { url: 'http://127.0.0.1:1/nobody' });
    await pay(contract.stripe);
    const [event] = (await contract.stripe.events.list({ type: 'charge.succeeded', limit: 1 })).data;
    expect(event?.pending_webhooks).toBe(1);
    expect(
      (await contract.stripe.events.list({ type: 'charge.succeeded', delivery_success: false })).data[0]?.id,
    ).toBe(event?.id);
    await contract.stripe.webhookEndpoints.update(id, { url: hook.url });
    await hook.until(1);
    await eventually(
      () => contract.stripe.events.retrieve(event?.id ?? ''),
      (one) => one.pending_webhooks === 0,
    );
    expect(types()).toEqual(['charge.succeeded']);
  });

  standIn('is given up after three days', async () => {
    await contract.stripe.webhookEndpoints.update(endpoint.id, { url: 'http://127.0.0.1:1/nobody' });
    await pay(contract.stripe);
    await contract.control('POST', 'clock', { advanceSeconds: 3 * 86_400 + 60 });
    await contract.control('POST', 'webhooks/flush');
    const all = (await deliveries()).filter((one) => one.targetId === endpoint.id);
    expect(all.map((one) => one.state)).toEqual(['given-up']);
    await contract.control('POST', 'clock', { offsetSeconds: 0 });
  });

  standIn('can be lost, doubled, held back and sent again on order', async () => {
    await contract.control('POST', 'webhooks', { drop: 1 });
    await pay(contract.stripe, 1001);
    await eventually(deliveries, (all) =>
      all.some((one) => one.targetId === endpoint.id && one.state === 'dropped'),
    );
    expect(hook.received).toEqual([]);

    await contract.control('POST', 'webhooks', { duplicate: 1 });
    await pay(contract.stripe, 1002);
    await hook.until(2);
    expect(hook.received[0]?.body).toBe(hook.received[1]?.body);

    await contract.control('POST', 'webhooks', { paused: true });
    await pay(contract.stripe, 1003);
    await new Promise((resolve) => setTimeout(resolve, 80));
    expect(hook.received).toHaveLength(2);
    await contract.control('POST', 'webhooks/flush');
    expect(hook.received).toHaveLength(3);

    await contract.control('POST', 'webhooks/resend', { event: verify(2).id });
    await contract.control('POST', 'webhooks/flush');
    expect(hook.received).toHaveLength(4);
    expect(verify(3).id).toBe(verify(2).id);
  });

  standIn('comes late, and in any order, on order', async () => {
    await contract.control('POST', 'webhooks', { delayMs: 120 });
    const since = Date.now();
    await pay(contract.stripe, 1001);
    await hook.until(1);
    expect(Date.now() - since).toBeGreaterThanOrEqual(115);

    await contract.control('POST', 'webhooks', { delayMs: 0, paused: true, shuffle: true });
    const made: number[] = [];
    for (let amount = 2000; amount < 2040; amount += 1) {
      await pay(contract.stripe, amount);
      made.push(amount);
    }
    await contract.control('POST', 'webhooks/flush');
    const came = hook.received
      .slice(1)
      .map((one) => (JSON.parse(one.body) as { data: { object: { amount: number } } }).data.object.amount);
    expect([...came].sort()).toEqual(made);
    expect(came).not.toEqual(made);
  });
});

describe('events', () => {
  it('are listed newest first and filtered by type, several types and time', async () => {
    const since = Math.floor(Date.now() / 1000) - 1;
    const charge = await pay(contract.stripe);
    await contract.stripe.refunds.create({ charge: charge.id });
    const of = async (params: Stripe.EventListParams) =>
      (await contract.stripe.events.list({ created: { gte: since }, ...params })).data.map((one) => one.type);
    expect((await of({ type: 'refund.created' }))[0]).toBe('refund.created');
    expect(new Set(await of({ types: ['refund.created', 'charge.refunded'] }))).toEqual(
      new Set(['refund.created', 'charge.refunded']),
    );
    expect(await of({ type: 'charge.refunded', created: { gt: since + 600 } })).toEqual([]);
    expect((await errorOf(contract.stripe.events.list({ type: 'a', types: ['b'] }))).statusCode).toBe(400);
  });

  it('of one payment are created, succeeded and charged', async () => {
    const charge = await pay(contract.stripe);
    const { data } = await contract.stripe.events.list({ limit: 20 });
    const about = data
      .filter((one) => [charge.id, charge.payment_intent].includes((one.data.object as { id: string }).id))
      .map((one) => one.type);
    expect(new Set(about)).toEqual(
      new Set(['payment_intent.created', 'charge.succeeded', 'payment_intent.succeeded']),
    );
  });

  standIn('go back thirty days and no further', async () => {
    await pay(contract.stripe);
    const [event] = (await contract.stripe.events.list({ type: 'charge.succeeded', limit: 1 })).data;
    await contract.control('POST', 'clock', { advanceSeconds: 31 * 86_400 });
    expect((await errorOf(contract.stripe.events.retrieve(event?.id ?? ''))).code).toBe('resource_missing');
    const listed = await contract.stripe.events.list({ type: 'charge.succeeded', limit: 100 });
    expect(listed.data.map((one) => one.id)).not.toContain(event?.id);
    await contract.control('POST', 'clock', { offsetSeconds: 0 });
    expect((await contract.stripe.events.retrieve(event?.id ?? '')).id).toBe(event?.id);
  });
});
