/**
 * The payment service for contract tests: the stand-in, driven by the real SDK. With STRIPE_SANDBOX_KEY set the
 * same calls go to a real sandbox instead, and cases that need the stand-in's control calls are skipped.
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { Stripe } from 'stripe';
import { it } from 'vitest';
import { startPaymentService, type RunningPaymentService } from '../../fake-services/stripe/server.ts';

const sandboxKey = process.env['STRIPE_SANDBOX_KEY'];
export const testKey = 'sk_test_contract';

/** Cases that only the stand-in can play. */
export const standIn = it.skipIf(sandboxKey !== undefined);

type Control = (
  method: 'GET' | 'POST' | 'DELETE',
  call: string,
  body?: object,
) => Promise<Record<string, unknown>>;

export interface Contract {
  stripe: Stripe;
  url: string;
  running: RunningPaymentService;
  dataDir: string;
  control: Control;
  client: (config?: { maxNetworkRetries?: number; timeout?: number; apiKey?: string }) => Stripe;
  /** A raw call with the right key. */
  raw: (
    method: string,
    path: string,
    init?: { body?: string; headers?: Record<string, string> },
  ) => Promise<Response>;
  restart: () => Promise<void>;
  close: () => Promise<void>;
}

export async function startContract(
  options: { webhookRetryMs?: number[]; seed?: string } = {},
): Promise<Contract> {
  const dataDir = mkdtempSync(path.join(tmpdir(), 'coilyard-payments-'));
  const start = (port: number) =>
    startPaymentService({
      port,
      dataDir,
      apiKey: testKey,
      tickMs: 20,
      webhookRetryMs: options.webhookRetryMs ?? [20],
      seed: options.seed ?? 'contract',
    });
  const contract: Contract = {
    running: await start(0),
    url: '',
    dataDir,
    stripe: new Stripe(testKey),
    control: async (method, call, body) => {
      const response = await fetch(`${contract.url}/_control/${call}`, {
        method,
        ...(body === undefined ? {} : { body: JSON.stringify(body) }),
      });
      const answer = (await response.json()) as Record<string, unknown>;
      if (!response.ok) throw new Error(`control ${call}: ${JSON.stringify(answer)}`);
      return answer;
    },
    client: (config = {}) =>
      sandboxKey === undefined
        ? new Stripe(config.apiKey ?? testKey, {
            host: '127.0.0.1',
            port: contract.running.port,
            protocol: 'http',
            maxNetworkRetries: config.maxNetworkRetries ?? 0,
            timeout: config.timeout ?? 5000,
            telemetry: false,
          })
        : new Stripe(config.apiKey ?? sandboxKey, {
            maxNetworkRetries: config.maxNetworkRetries ?? 0,
            telemetry: false,
          }),
    raw: (method, target, init = {}) =>
      fetch(`${contract.url}${target}`, {
        method,
        headers: { authorization: `Bearer ${testKey}`, ...init.headers },
        ...(init.body === undefined ? {} : { body: init.body }),
      }),
    restart: async () => {
      const { port } = contract.running;
      await contract.running.close();
      contract.running = await start(port);
    },
    close: async () => {
      await contract.running.close();
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
  contract.url = contract.running.url;
  contract.stripe = contract.client();
  return contract;
}

/** What the call threw, as the SDK's error. Throws when it did not throw one. */
export async function errorOf(work: Promise<unknown>): Promise<Stripe.errors.StripeError> {
  try {
    await work;
  } catch (error) {
    if (error instanceof Stripe.errors.StripeError) return error;
    throw error;
  }
  throw new Error('the call should have been refused');
}

let keys = 0;
export const newKey = () => `key-${String(process.pid)}-${String(Date.now())}-${String((keys += 1))}`;

export const sessionParams = (
  amount = 120_000,
  extra: Partial<Stripe.Checkout.SessionCreateParams> = {},
): Stripe.Checkout.SessionCreateParams => ({
  mode: 'payment',
  success_url: 'http://localhost:3000/paid?session={CHECKOUT_SESSION_ID}',
  cancel_url: 'http://localhost:3000/back',
  line_items: [
    { quantity: 1, price_data: { currency: 'eur', unit_amount: amount, product_data: { name: 'Drawing' } } },
  ],
  ...extra,
});

/** Takes a payment through the API and gives its charge. */
export async function pay(
  stripe: Stripe,
  amount = 10_000,
  method = 'pm_card_visa',
  extra: Partial<Stripe.PaymentIntentCreateParams> = {},
): Promise<Stripe.Charge> {
  const intent = await stripe.paymentIntents.create({
    amount,
    currency: 'eur',
    payment_method: method,
    confirm: true,
    automatic_payment_methods: { enabled: true, allow_redirects: 'never' },
    expand: ['latest_charge'],
    ...extra,
  });
  if (intent.latest_charge === null || typeof intent.latest_charge === 'string') throw new Error('no charge');
  return intent.latest_charge;
}

export const accountParams = (): Stripe.V2.Core.AccountCreateParams => ({
  display_name: 'Copperfold Works',
  contact_email: 'owner@copperfold.example',
  dashboard: 'express',
  identity: { country: 'DE', entity_type: 'company' },
  configuration: {
    recipient: { capabilities: { stripe_balance: { stripe_transfers: { requested: true } } } },
  },
  defaults: { responsibilities: { fees_collector: 'application', losses_collector: 'application' } },
  include: ['configuration.recipient', 'requirements'],
});

/** An account that can receive transfers; in a real sandbox one that was onboarded by hand. */
export async function payee({ stripe, control }: Contract): Promise<string> {
  const prepared = process.env['STRIPE_SANDBOX_ACCOUNT'];
  if (sandboxKey !== undefined && prepared !== undefined) return prepared;
  const { id } = await stripe.v2.core.accounts.create(accountParams());
  await control('POST', `accounts/${id}/activate`);
  return id;
}

/** Fills and sends the hosted page. */
export async function payOnPage(pageUrl: string, fields: Record<string, string> = {}): Promise<Response> {
  return fetch(pageUrl, {
    method: 'POST',
    redirect: 'manual',
    body: new URLSearchParams({ card: '4242 4242 4242 4242', expiry: '12/34', cvc: '123', ...fields }),
  });
}

export interface Received {
  body: string;
  signature: string;
  type: string;
}

export interface Listener {
  url: string;
  received: Received[];
  /** Status of the next answers; the last one stays. */
  answers: number[];
  /** Waits until so many have come. */
  until: (count: number, timeoutMs?: number) => Promise<Received[]>;
  close: () => Promise<void>;
}

/** A webhook receiver that keeps what it gets. */
export async function listener(): Promise<Listener> {
  const received: Received[] = [];
  const answers: number[] = [200];
  const server: Server = createServer((request, response) => {
    const chunks: Buffer[] = [];
    request.on('data', (chunk: Buffer) => chunks.push(chunk));
    request.on('end', () => {
      const body = Buffer.concat(chunks).toString('utf8');
      const { type } = JSON.parse(body) as { type: string };
      received.push({ body, signature: String(request.headers['stripe-signature']), type });
      response.writeHead(answers.length > 1 ? (answers.shift() ?? 200) : (answers[0] ?? 200)).end();
    });
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const address = server.address();
  const port = typeof address === 'object' && address !== null ? address.port : 0;
  return {
    url: `http://127.0.0.1:${String(port)}/hook`,
    received,
    answers,
    until: async (count, timeoutMs = 5000) => {
      const deadline = Date.now() + timeoutMs;
      while (received.length < count) {
        if (Date.now() > deadline)
          throw new Error(
            `${String(received.length)} of ${String(count)} webhooks: ${received.map((one) => one.type).join(', ')}`,
          );
        await new Promise((resolve) => setTimeout(resolve, 10));
      }
      return received;
    },
    close: () => {
      server.closeAllConnections();
      return new Promise((resolve) => server.close(() => resolve()));
    },
  };
}

/** Waits until the check holds; throws when it does not in time. */
export async function eventually<T>(
  look: () => Promise<T>,
  holds: (value: T) => boolean,
  timeoutMs = 5000,
): Promise<T> {
  const deadline = Date.now() + timeoutMs;
  for (;;) {
    const value = await look();
    if (holds(value)) return value;
    if (Date.now() > deadline) throw new Error(`not in time: ${JSON.stringify(value)}`);
    await new Promise((resolve) => setTimeout(resolve, 10));
  }
}
