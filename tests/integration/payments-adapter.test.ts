import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
  createPayments,
  PaymentServiceError,
  type Payments,
} from '../../src/lib/server/adapters/payments.ts';
import { listener, newKey, payOnPage, startContract, testKey, type Contract } from '../support/payments.ts';

let contract: Contract;
let payments: Payments;

beforeAll(async () => {
  contract = await startContract();
  payments = make();
});
beforeEach(async () => {
  await contract.control('DELETE', 'faults');
});
afterAll(() => contract.close());

function make(changes: Partial<Parameters<typeof createPayments>[0]> = {}): Payments {
  return createPayments({
    secretKey: testKey,
    apiBase: contract.url,
    webhookSecret: 'whsec_payments',
    accountWebhookSecret: 'whsec_accounts',
    timeoutMs: 2000,
    maxNetworkRetries: 0,
    ...changes,
  });
}

const sessionInput = (idempotencyKey = newKey()) => ({
  idempotencyKey,
  currency: 'EUR' as const,
  lines: [
    { name: 'Milestone: build', description: 'Order R-1042', unitAmount: 250_000 },
    { name: 'Freight', unitAmount: 4_500, quantity: 2 },
  ],
  successUrl: 'http://localhost:3000/orders/1?paid={CHECKOUT_SESSION_ID}',
  cancelUrl: 'http://localhost:3000/orders/1',
  clientReferenceId: 'operation-1',
  transferGroup: 'order-1',
  metadata: { milestone: 'm1' },
  customerEmail: 'purchaser@millrace.example',
});

async function paidCharge(): Promise<string> {
  const session = await payments.createCheckoutSession(sessionInput());
  await payOnPage(session.url ?? '');
  const { chargeId } = await payments.retrieveSession(session.id);
  if (chargeId === null) throw new Error('not paid');
  return chargeId;
}

async function activeAccount(): Promise<string> {
  const { id } = await payments.createAccount({
    idempotencyKey: newKey(),
    displayName: 'Copperfold Works',
    contactEmail: 'owner@copperfold.example',
    country: 'DE',
    metadata: { company: 'c1' },
  });
  await contract.control('POST', `accounts/${id}/activate`);
  return id;
}

const transferInput = (destinationId: string, sourceChargeId?: string, amount = 1000) => ({
  idempotencyKey: newKey(),
  amount,
  currency: 'EUR' as const,
  destinationId,
  transferGroup: 'order-1',
  metadata: { milestone: 'm1' },
  ...(sourceChargeId === undefined ? {} : { sourceChargeId }),
});

async function kindOf(work: Promise<unknown>): Promise<PaymentServiceError> {
  const error: unknown = await work.then(
    () => new Error('not refused'),
    (caught: unknown) => caught,
  );
  if (!(error instanceof PaymentServiceError)) throw error;
  return error;
}

describe('a checkout session', () => {
  it('is made with lines, references and metadata, and leads to a charge with its fee', async () => {
    const session = await payments.createCheckoutSession(sessionInput());
    expect(session).toMatchObject({
      status: 'open',
      paymentStatus: 'unpaid',
      amount: 259_000,
      currency: 'EUR',
      clientReferenceId: 'operation-1',
      metadata: { milestone: 'm1' },
      paymentIntentId: null,
      chargeId: null,
    });
    expect(session.expiresAt - session.createdAt).toBe(24 * 3_600_000);
    await payOnPage(session.url ?? '');
    const paid = await payments.retrieveSession(session.id);
    expect(paid).toMatchObject({ status: 'complete', paymentStatus: 'paid', url: null });
    const charge = await payments.retrieveCharge(paid.chargeId ?? '');
    expect(charge).toMatchObject({
      status: 'succeeded',
      amount: 259_000,
      amountRefunded: 0,
      currency: 'EUR',
      disputed: false,
      transferGroup: 'order-1',
      metadata: { milestone: 'm1' },
      paymentIntentId: paid.paymentIntentId,
    });
    expect(charge.balanceTransaction).toMatchObject({
      type: 'charge',
      amount: 259_000,
      sourceId: charge.id,
      available: false,
    });
    expect(charge.balanceTransaction?.net).toBe(259_000 - (charge.balanceTransaction?.fee ?? 0));
  });

  it('can be given an end and expired early; a second time is refused', async () => {
    const end = Math.ceil(Date.now() / 1000) * 1000 + 3_600_000;
    const session = await payments.createCheckoutSession({ ...sessionInput(), expiresAt: end });
    expect(session.expiresAt).toBe(end);
    expect((await payments.expireSession(session.id, { idempotencyKey: newKey() })).status).toBe('expired');
    expect(await kindOf(payments.expireSession(session.id, { idempotencyKey: newKey() }))).toMatchObject({
      kind: 'invalid',
    });
    const listed: string[] = [];
    for await (const one of payments.listSessions({ from: session.createdAt })) listed.push(one.id);
    expect(listed).toContain(session.id);
  });

  it('is the same one for the same key, and refused for other parameters', async () => {
    const input = sessionInput();
    const first = await payments.createCheckoutSession(input);
    expect((await payments.createCheckoutSession(input)).id).toBe(first.id);
    expect(
      (await kindOf(payments.createCheckoutSession({ ...input, clientReferenceId: 'other' }))).kind,
    ).toBe('key-reused');
  });
});

describe('money out', () => {
  it('is transferred from its charge, found by its group, and taken back', async () => {
    const chargeId = await paidCharge();
    const accountId = await activeAccount();
    const input = { ...transferInput(accountId, chargeId, 200_000), transferGroup: 'order-find' };
    const transfer = await payments.createTransfer(input);
    expect(transfer).toMatchObject({
      amount: 200_000,
      amountReversed: 0,
      currency: 'EUR',
      destinationId: accountId,
      sourceChargeId: chargeId,
      metadata: { milestone: 'm1' },
    });
    expect((await payments.findTransfers('order-find')).map((one) => one.id)).toEqual([transfer.id]);
    expect((await payments.createTransfer(input)).id).toBe(transfer.id);
    const reversal = await payments.reverseTransfer({
      idempotencyKey: newKey(),
      transferId: transfer.id,
      amount: 50_000,
      metadata: {},
    });
    expect(reversal).toMatchObject({ amount: 50_000, transferId: transfer.id });
    expect((await payments.retrieveTransfer(transfer.id)).amountReversed).toBe(50_000);
  });

  it('is refunded in parts', async () => {
    const chargeId = await paidCharge();
    const refund = await payments.createRefund({
      idempotencyKey: newKey(),
      chargeId,
      amount: 9_000,
      metadata: { milestone: 'm1' },
    });
    expect(refund).toMatchObject({
      status: 'succeeded',
      amount: 9_000,
      currency: 'EUR',
      chargeId,
      failureReason: null,
    });
    expect((await payments.findRefunds(chargeId)).map((one) => one.id)).toEqual([refund.id]);
    expect(await payments.retrieveRefund(refund.id)).toEqual(refund);
  });

  it('is listed by period, and adds up to the balance', async () => {
    await paidCharge();
    let net = 0;
    for await (const row of payments.listBalanceTransactions({ to: Date.now() + 60_000 })) net += row.net;
    const { available, pending } = await payments.retrieveBalance();
    expect([...available, ...pending].reduce((sum, one) => sum + one.amount, 0)).toBe(net);
    const none: unknown[] = [];
    for await (const row of payments.listBalanceTransactions({ from: Date.now() + 60_000 })) none.push(row);
    expect(none).toEqual([]);
  });
});

describe('a payee account', () => {
  it('tells what it needs, leads to a form, and can receive after it', async () => {
    const account = await payments.createAccount({
      idempotencyKey: newKey(),
      displayName: 'Tallow Bend Shop',
      contactEmail: 'a@tallow.example',
      country: 'DE',
      metadata: { company: 'c2' },
    });
    expect(account).toMatchObject({
      transfers: 'restricted',
      canReceive: false,
      closed: false,
      metadata: { company: 'c2' },
    });
    expect(account.needs.length).toBeGreaterThan(0);
    const link = await payments.createAccountLink({
      idempotencyKey: newKey(),
      accountId: account.id,
      refreshUrl: 'http://localhost:3000/refresh',
      returnUrl: 'http://localhost:3000/return',
    });
    expect(link.expiresAt).toBeGreaterThan(Date.now());
    await fetch(link.url);
    await fetch(link.url, {
      method: 'POST',
      redirect: 'manual',
      body: new URLSearchParams({
        answer: 'submit',
        name: 'Tallow Bend Shop',
        iban: 'DE89370400440532013000',
      }),
    });
    expect(await payments.retrieveAccount(account.id)).toMatchObject({
      transfers: 'active',
      canReceive: true,
      needs: [],
    });
  });
});

describe('what goes wrong', () => {
  it('is told by kind, from codes', async () => {
    const chargeId = await paidCharge();
    const accountId = await activeAccount();
    const refund = (amount: number) =>
      payments.createRefund({ idempotencyKey: newKey(), chargeId, amount, metadata: {} });
    expect(
      (await kindOf(payments.createTransfer(transferInput(accountId, undefined, 90_000_000)))).kind,
    ).toBe('insufficient-balance');
    expect((await kindOf(payments.createTransfer(transferInput('acct_none', chargeId)))).kind).toBe(
      'missing',
    );
    expect((await kindOf(payments.retrieveAccount('acct_none'))).kind).toBe('missing');
    await contract.control('POST', `accounts/${accountId}/restrict`);
    expect((await kindOf(payments.createTransfer(transferInput(accountId, chargeId)))).kind).toBe(
      'payee-restricted',
    );
    await contract.control('POST', `accounts/${accountId}/reject`);
    expect((await kindOf(payments.createTransfer(transferInput(accountId, chargeId)))).kind).toBe(
      'payee-restricted',
    );
    expect((await kindOf(refund(900_000))).kind).toBe('invalid');
    await refund(259_000);
    expect((await kindOf(refund(1))).kind).toBe('already-refunded');
    const other = await paidCharge();
    const dispute = await contract.control('POST', 'disputes', { charge: other, amount: 5_000 });
    expect(
      (
        await kindOf(
          payments.createRefund({ idempotencyKey: newKey(), chargeId: other, amount: 1, metadata: {} }),
        )
      ).kind,
    ).toBe('disputed');
    expect(await payments.retrieveDispute(String(dispute['id']))).toMatchObject({
      status: 'needs_response',
      amount: 5_000,
      currency: 'EUR',
      chargeId: other,
    });
    expect((await kindOf(make({ secretKey: 'sk_test_wrong' }).retrieveBalance())).kind).toBe('unauthorized');
  });

  it.each([
    ['error-500', 'unknown'],
    ['error-500-after-effect', 'unknown'],
    ['unavailable-503', 'unknown'],
    ['cut-body', 'unknown'],
    ['hang-after-effect', 'unknown'],
    ['rate-limit-429', 'retryable'],
    ['lock-timeout-429', 'retryable'],
    ['conflict-409', 'retryable'],
  ])('%s is %s', async (fault, kind) => {
    await contract.control('POST', 'faults', { kind: fault, path: '/v1/checkout' });
    const error = await kindOf(make({ timeoutMs: 200 }).createCheckoutSession(sessionInput()));
    expect(error).toMatchObject({ kind, replayed: false });
  });

  it.each([['cut-after-effect'], ['cut-before-effect']])(
    '%s is unknown, and the same key tells',
    async (fault) => {
      const input = sessionInput();
      await contract.control('POST', 'faults', { kind: fault, path: '/v1/checkout', times: 2 });
      expect((await kindOf(payments.createCheckoutSession(input))).kind).toBe('unknown');
      expect((await payments.createCheckoutSession(input)).status).toBe('open');
    },
  );

  it('a stored failure says that it is one', async () => {
    const input = sessionInput();
    await contract.control('POST', 'faults', { kind: 'error-500', path: '/v1/checkout' });
    await kindOf(payments.createCheckoutSession(input));
    expect(await kindOf(payments.createCheckoutSession(input))).toMatchObject({
      kind: 'unknown',
      replayed: true,
    });
  });

  it('a service that is not there is unknown', async () => {
    expect((await kindOf(make({ apiBase: 'http://127.0.0.1:1' }).retrieveBalance())).kind).toBe('unknown');
  });
});

describe('webhooks', () => {
  it('about payments are verified and read; forged, altered, stale and unsigned ones are refused', async () => {
    const hook = await listener();
    const endpoint = await contract.stripe.webhookEndpoints.create({
      url: hook.url,
      enabled_events: ['checkout.session.completed'],
    });
    const receiving = make({ webhookSecret: endpoint.secret ?? '' });
    const session = await payments.createCheckoutSession(sessionInput());
    await payOnPage(session.url ?? '');
    const [sent] = await hook.until(1);
    const body = sent?.body ?? '';
    const signature = sent?.signature ?? '';
    expect(receiving.constructEvent(Buffer.from(body), signature)).toMatchObject({
      type: 'checkout.session.completed',
      objectType: 'checkout.session',
      objectId: session.id,
      livemode: false,
    });
    const stale = contract.stripe.webhooks.generateTestHeaderString({
      payload: body,
      secret: endpoint.secret ?? '',
      timestamp: Math.floor(Date.now() / 1000) - 301,
    });
    for (const attempt of [
      () => payments.constructEvent(body, signature),
      () => receiving.constructEvent(`${body} `, signature),
      () => receiving.constructEvent(body, stale),
      () => receiving.constructEvent(body, null),
      () => receiving.constructEvent(body, 't=1,v1=00'),
    ]) {
      expect(attempt).toThrow(expect.objectContaining({ kind: 'bad-signature' }));
    }
    const listed: string[] = [];
    for await (const event of payments.listEvents({ types: ['checkout.session.completed'] }))
      listed.push(event.objectId ?? '');
    expect(listed[0]).toBe(session.id);
    await hook.close();
  });

  it('about accounts name the account; a payment event is not taken for one', async () => {
    const hook = await listener();
    const destination = await contract.stripe.v2.core.eventDestinations.create({
      name: 'Accounts',
      type: 'webhook_endpoint',
      event_payload: 'thin',
      enabled_events: ['v2.core.account[configuration.recipient].capability_status_updated'],
      webhook_endpoint: { url: hook.url },
      include: ['webhook_endpoint.signing_secret'],
    });
    const secret = destination.webhook_endpoint?.signing_secret ?? '';
    const receiving = make({ accountWebhookSecret: secret, webhookSecret: secret });
    const accountId = await activeAccount();
    const [sent] = await hook.until(1);
    expect(receiving.parseAccountEvent(sent?.body ?? '', sent?.signature ?? '')).toMatchObject({
      accountId,
      type: 'v2.core.account[configuration.recipient].capability_status_updated',
    });
    expect(() => payments.parseAccountEvent(sent?.body ?? '', sent?.signature ?? '')).toThrow(
      PaymentServiceError,
    );
    expect(() => receiving.constructEvent(sent?.body ?? '', sent?.signature ?? '')).toThrow(
      PaymentServiceError,
    );
    await hook.close();
  });
});
