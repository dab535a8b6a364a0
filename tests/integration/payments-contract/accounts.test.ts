/**
 * Accounts v2 as documented ("Accounts v2 API", "Account links", "Event destinations", thin events), recalled
 * from memory and from the SDK's types.
 */
import type { Stripe } from 'stripe';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  accountParams,
  errorOf,
  listener,
  newKey,
  payee,
  standIn,
  startContract,
  type Contract,
  type Listener,
} from '../../support/payments.ts';

let contract: Contract;
beforeAll(async () => {
  contract = await startContract();
});
afterAll(() => contract.close());

const accounts = () => contract.stripe.v2.core.accounts;
const read = (id: string) =>
  accounts().retrieve(id, { include: ['configuration.recipient', 'requirements', 'identity'] });
const transfersOf = (account: Stripe.V2.Core.Account) =>
  account.configuration?.recipient?.capabilities?.stripe_balance?.stripe_transfers;
const link = (account: string, type: 'account_onboarding' | 'account_update' = 'account_onboarding') =>
  contract.stripe.v2.core.accountLinks.create({
    account,
    use_case: {
      type,
      [type]: { refresh_url: 'http://localhost:3000/refresh', return_url: 'http://localhost:3000/return' },
    },
  });
const fill = (url: string, fields: Record<string, string> = {}) =>
  fetch(url, {
    method: 'POST',
    redirect: 'manual',
    body: new URLSearchParams({
      answer: 'submit',
      name: 'Copperfold Works',
      iban: 'DE89 3704 0044 0532 0130 00',
      ...fields,
    }),
  });

describe('an account', () => {
  it('starts restricted, with what its holder has to provide', async () => {
    const account = await accounts().create(accountParams());
    expect(account).toMatchObject({
      object: 'v2.core.account',
      applied_configurations: ['recipient'],
      display_name: 'Copperfold Works',
    });
    expect(transfersOf(account)?.status).toBe('restricted');
    expect(account.requirements?.entries?.length).toBeGreaterThan(0);
    expect(account.requirements?.entries?.[0]).toMatchObject({ awaiting_action_from: 'user' });
  });

  it('shows only the parts that are asked for', async () => {
    const { id } = await accounts().create(accountParams());
    const bare = await accounts().retrieve(id);
    expect(bare.configuration).toBeUndefined();
    expect(bare.requirements).toBeUndefined();
    const full = await read(id);
    expect(full.identity?.country?.toUpperCase()).toBe('DE');
    expect(transfersOf(full)).toBeDefined();
  });

  it('that does not exist is not found, in v2’s own code', async () => {
    expect(await errorOf(accounts().retrieve('acct_none'))).toMatchObject({
      statusCode: 404,
      code: 'not_found',
    });
  });

  standIn('needs a country to receive and an address for its dashboard', async () => {
    const { identity: _country, ...withoutCountry } = accountParams();
    expect((await errorOf(accounts().create(withoutCountry))).statusCode).toBe(400);
    const { contact_email: _email, ...withoutEmail } = accountParams();
    expect((await errorOf(accounts().create(withoutEmail))).statusCode).toBe(400);
  });

  standIn('refuses unknown parameters', async () => {
    const error = await errorOf(
      contract.stripe.rawRequest('POST', '/v2/core/accounts', { ...accountParams(), shoe_size: 44 }),
    );
    expect(error).toMatchObject({ statusCode: 400, code: 'parameter_unknown' });
  });

  it('can be changed, and asked to receive later', async () => {
    const { id } = await accounts().create({
      display_name: 'Tallow',
      contact_email: 'a@tallow.example',
      identity: { country: 'DE' },
    });
    expect(transfersOf(await read(id))).toBeUndefined();
    const changed = await accounts().update(id, {
      display_name: 'Tallow Bend Shop',
      configuration: {
        recipient: { capabilities: { stripe_balance: { stripe_transfers: { requested: true } } } },
      },
      metadata: { company: 'c1' },
      include: ['configuration.recipient'],
    });
    expect(changed).toMatchObject({ display_name: 'Tallow Bend Shop', metadata: { company: 'c1' } });
    expect(transfersOf(changed)?.status).toBe('restricted');
  });

  standIn('is listed in pages that the SDK walks', async () => {
    const made: string[] = [];
    for (let at = 0; at < 5; at += 1)
      made.push((await accounts().create({ display_name: `Shop ${String(at)}` })).id);
    const found: string[] = [];
    for await (const account of accounts().list({ limit: 2 })) found.push(account.id);
    expect(found.slice(0, 5)).toEqual([...made].reverse());
    expect(new Set(found).size).toBe(found.length);
  });
});

describe('an onboarding link', () => {
  standIn('opens once, and its form makes the account able to receive', async () => {
    const { id } = await accounts().create(accountParams());
    const { url, expires_at } = await link(id);
    expect(Date.parse(expires_at)).toBeGreaterThan(Date.now());
    const page = await fetch(url);
    expect(page.status).toBe(200);
    expect(await page.text()).toContain('Set up payouts for Copperfold Works');
    const answer = await fill(url);
    expect(answer.headers.get('location')).toBe('http://localhost:3000/return');
    expect(transfersOf(await read(id))).toEqual({ status: 'active', status_details: [] });
    expect((await read(id)).requirements?.entries).toEqual([]);
  });

  standIn(
    'sends a second opening, a second answer, and one that is too late to the refresh address',
    async () => {
      const { id } = await accounts().create(accountParams());
      const first = await link(id);
      await fetch(first.url);
      const again = await fetch(first.url, { redirect: 'manual' });
      expect([again.status, again.headers.get('location')]).toEqual([303, 'http://localhost:3000/refresh']);
      await fill(first.url);
      expect((await fill(first.url)).headers.get('location')).toBe('http://localhost:3000/refresh');
      const late = await link(id);
      await contract.control('POST', 'clock', { advanceSeconds: 600 });
      expect((await fetch(late.url, { redirect: 'manual' })).headers.get('location')).toBe(
        'http://localhost:3000/refresh',
      );
    },
  );

  standIn('can be left unfinished; the account stays restricted', async () => {
    const { id } = await accounts().create(accountParams());
    const { url } = await link(id);
    await fetch(url);
    expect((await fill(url, { answer: 'later' })).headers.get('location')).toBe(
      'http://localhost:3000/return',
    );
    expect(transfersOf(await read(id))?.status).toBe('restricted');
  });

  standIn('says what is wrong and keeps what was typed', async () => {
    const { id } = await accounts().create(accountParams());
    const { url } = await link(id);
    await fetch(url);
    const answer = await fill(url, { iban: 'nonsense' });
    expect(answer.status).toBe(400);
    const html = await answer.text();
    expect(html).toContain('Enter the IBAN');
    expect(html).toContain('value="nonsense"');
    expect((await fill(url)).status).toBe(303);
  });

  it('needs an account that exists, and the case it names', async () => {
    expect((await errorOf(link('acct_none'))).statusCode).toBe(404);
    const { id } = await accounts().create(accountParams());
    const params = { account: id, use_case: { type: 'account_onboarding' as const } };
    expect((await errorOf(contract.stripe.v2.core.accountLinks.create(params))).statusCode).toBe(400);
  });

  standIn('is made anew only with a new key', async () => {
    const { id } = await accounts().create(accountParams());
    const idempotencyKey = newKey();
    const params = {
      account: id,
      use_case: {
        type: 'account_onboarding' as const,
        account_onboarding: { refresh_url: 'http://localhost:3000/r' },
      },
    };
    const first = await contract.stripe.v2.core.accountLinks.create(params, { idempotencyKey });
    expect((await contract.stripe.v2.core.accountLinks.create(params, { idempotencyKey })).url).toBe(
      first.url,
    );
    expect(
      (await contract.stripe.v2.core.accountLinks.create(params, { idempotencyKey: newKey() })).url,
    ).not.toBe(first.url);
  });
});

describe('thin events', () => {
  let hook: Listener;
  let secret = '';
  let destination = '';
  const capability = 'v2.core.account[configuration.recipient].capability_status_updated';

  /** What is on its way has come, and is forgotten. */
  const settled = async () => {
    await contract.control('POST', 'webhooks/flush');
    hook.received.length = 0;
  };

  beforeAll(async () => {
    hook = await listener();
    const made = await contract.stripe.v2.core.eventDestinations.create({
      name: 'Accounts',
      type: 'webhook_endpoint',
      event_payload: 'thin',
      enabled_events: [capability, 'v2.core.account[requirements].updated'],
      webhook_endpoint: { url: hook.url },
      include: ['webhook_endpoint.signing_secret', 'webhook_endpoint.url'],
    });
    secret = made.webhook_endpoint?.signing_secret ?? '';
    destination = made.id;
  });
  afterAll(() => hook.close());

  standIn('tell the signing secret at creation and never again', async () => {
    expect(secret).toMatch(/^whsec_/);
    const read = await contract.stripe.v2.core.eventDestinations.retrieve(destination, {
      include: ['webhook_endpoint.url'],
    });
    expect(read).toMatchObject({
      status: 'enabled',
      event_payload: 'thin',
      webhook_endpoint: { url: hook.url },
    });
    expect(read.webhook_endpoint?.signing_secret).toBeUndefined();
  });

  standIn(
    'name the account that changed and carry nothing of it; the SDK fetches event and account',
    async () => {
      const id = await payee(contract);
      const events = await hook.until(2);
      const sent = events.find((one) => one.type === capability);
      expect(JSON.parse(sent?.body ?? '{}')).not.toHaveProperty('data');
      const notification = contract.stripe.parseEventNotification(
        sent?.body ?? '',
        sent?.signature ?? '',
        secret,
      );
      expect(notification).toMatchObject({
        object: 'v2.core.event',
        type: capability,
        related_object: { id, type: 'v2.core.account' },
      });
      if (notification.type !== capability) throw new Error('another type');
      expect(await notification.fetchRelatedObject()).toMatchObject({ id, object: 'v2.core.account' });
      expect(await notification.fetchEvent()).toMatchObject({
        id: notification.id,
        data: { updated_capability: 'stripe_balance.stripe_transfers' },
      });
    },
  );

  standIn('are refused by the SDK under another secret or with another body', async () => {
    const [sent] = await hook.until(1);
    expect(() =>
      contract.stripe.parseEventNotification(sent?.body ?? '', sent?.signature ?? '', 'whsec_other'),
    ).toThrow();
    expect(() =>
      contract.stripe.parseEventNotification(`${sent?.body ?? ''} `, sent?.signature ?? '', secret),
    ).toThrow();
  });

  standIn('follow restriction and return of an account', async () => {
    const id = await payee(contract);
    await settled();
    await contract.control('POST', `accounts/${id}/restrict`);
    await contract.control('POST', `accounts/${id}/activate`);
    const events = await hook.until(4);
    expect(events.filter((one) => one.type === capability)).toHaveLength(2);
    expect(transfersOf(await read(id))?.status).toBe('active');
  });

  standIn('can be pinged, stopped, moved and removed', async () => {
    await settled();
    const ping = await contract.stripe.v2.core.eventDestinations.ping(destination);
    expect(ping.type).toBe('v2.core.event_destination.ping');
    await hook.until(1);
    expect((await contract.stripe.v2.core.eventDestinations.disable(destination)).status).toBe('disabled');
    await settled();
    await payee(contract);
    await contract.control('POST', 'webhooks/flush');
    expect(hook.received).toEqual([]);
    expect((await contract.stripe.v2.core.eventDestinations.enable(destination)).status).toBe('enabled');
    const moved = await contract.stripe.v2.core.eventDestinations.update(destination, {
      webhook_endpoint: { url: `${hook.url}/moved` },
      include: ['webhook_endpoint.url'],
    });
    expect(moved.webhook_endpoint?.url).toBe(`${hook.url}/moved`);
    await contract.stripe.v2.core.eventDestinations.del(destination);
    expect((await errorOf(contract.stripe.v2.core.eventDestinations.retrieve(destination))).statusCode).toBe(
      404,
    );
  });

  standIn('can be listed by the account they are about', async () => {
    const id = await payee(contract);
    const types: string[] = [];
    for await (const event of contract.stripe.v2.core.events.list({ object_id: id })) types.push(event.type);
    expect(types).toContain('v2.core.account.created');
    expect(types).toContain(capability);
  });
});
