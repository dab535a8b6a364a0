import { mkdtempSync, rmSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { eq } from 'drizzle-orm';
import { Stripe } from 'stripe';
import { startPaymentService } from '../../fake-services/stripe/server.ts';
import { createPayments, type Payments } from '../../src/lib/server/adapters/payments.ts';
import { moveClock } from '../../src/lib/server/adapters/clock.ts';
import type { Database } from '../../src/lib/server/db/index.ts';
import { paymentSession } from '../../src/lib/server/db/schema/money.ts';
import { milestone } from '../../src/lib/server/db/schema/orders.ts';
import {
  receiveAccountEvent,
  receivePaymentEvent,
  usePaymentService,
} from '../../src/lib/server/money/index.ts';
import { drainJobs } from '../../src/lib/server/workflows/run-worker.ts';
import { testDatabase, type TestDatabase } from './db.ts';

const apiKey = 'sk_test_coilyard_tests';

export interface SentMail {
  to: string;
  subject: string;
  text: string;
  html: string;
}

/** Our side and the payment service's stand-in with its webhooks between them, each test its own. */
export interface MoneyWorld {
  test: TestDatabase;
  db: Database;
  payments: Payments;
  /** The adapter again with another timeout or retry setting. */
  paymentsWith(options: { timeoutMs?: number; maxNetworkRetries?: number }): Payments;
  stripe: Stripe;
  url: string;
  /** Of the endpoint for payments, to sign events by hand. */
  webhookSecret: string;
  mails: SentMail[];
  /** Stops taking webhooks (as a dead endpoint does) while false. */
  webhooks: { up: boolean; received: number; raw: { body: string; signature: string }[] };
  control<T = Record<string, unknown>>(method: string, path: string, body?: unknown): Promise<T>;
  /** Delivers webhooks and runs jobs until nothing is left to do. */
  settle(): Promise<void>;
  /** Jobs, recovery and mails only; webhooks stay where they are. */
  work(): Promise<void>;
  /** Moves the business clock. */
  advance(ms: number): Promise<void>;
  pay(milestoneId: string, card?: string): Promise<string>;
  close(): Promise<void>;
}

function receiver(world: {
  db: () => Database;
  payments: () => Payments;
  state: MoneyWorld['webhooks'];
}): Server {
  return createServer((request, response) => {
    const chunks: Buffer[] = [];
    request.on('data', (chunk: Buffer) => chunks.push(chunk));
    request.on('end', () => {
      const body = Buffer.concat(chunks);
      const signature = String(request.headers['stripe-signature'] ?? '');
      world.state.raw.push({ body: body.toString('utf8'), signature });
      if (!world.state.up) {
        response.writeHead(503).end();
        return;
      }
      const take = request.url === '/accounts' ? receiveAccountEvent : receivePaymentEvent;
      take(world.db(), body, signature, world.payments())
        .then(() => {
          world.state.received += 1;
          response.writeHead(200).end('{}');
        })
        .catch(() => response.writeHead(500).end());
    });
  });
}

export async function moneyWorld(): Promise<MoneyWorld> {
  const dataDir = mkdtempSync(path.join(tmpdir(), 'coilyard-payments-'));
  const running = await startPaymentService({ port: 0, dataDir, apiKey, webhookRetryMs: [60_000] });
  const test = await testDatabase();
  const db = test.db;
  const mails: SentMail[] = [];
  const webhooks: MoneyWorld['webhooks'] = { up: true, received: 0, raw: [] };
  const ours: { payments?: Payments } = {};
  const server = receiver({
    db: () => db,
    payments: () => {
      if (!ours.payments) throw new Error('a webhook came before the adapter was made');
      return ours.payments;
    },
    state: webhooks,
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const port = (server.address() as AddressInfo).port;
  const stripe = new Stripe(apiKey, {
    host: '127.0.0.1',
    port: running.port,
    protocol: 'http',
    telemetry: false,
    maxNetworkRetries: 0,
  });
  const endpoint = await stripe.webhookEndpoints.create({
    url: `http://127.0.0.1:${port}/payments`,
    enabled_events: ['*'],
  });
  const destination = await stripe.v2.core.eventDestinations.create({
    name: 'accounts',
    type: 'webhook_endpoint',
    event_payload: 'thin',
    enabled_events: [
      'v2.core.account[requirements].updated',
      'v2.core.account[configuration.recipient].capability_status_updated',
    ],
    webhook_endpoint: { url: `http://127.0.0.1:${port}/accounts` },
    include: ['webhook_endpoint.signing_secret'],
  });
  const paymentsWith = (options: { timeoutMs?: number; maxNetworkRetries?: number }) =>
    createPayments({
      secretKey: apiKey,
      apiBase: running.url,
      webhookSecret: endpoint.secret ?? '',
      accountWebhookSecret: destination.webhook_endpoint?.signing_secret ?? '',
      timeoutMs: 3_000,
      maxNetworkRetries: 0,
      ...options,
    });
  const payments = paymentsWith({});
  ours.payments = payments;
  usePaymentService(payments);

  const control = async <T>(method: string, where: string, body?: unknown): Promise<T> => {
    const response = await fetch(`${running.url}/_control/${where}`, {
      method,
      ...(body === undefined ? {} : { body: JSON.stringify(body) }),
    });
    const answer = (await response.json()) as T;
    if (!response.ok) throw new Error(`control ${where}: ${JSON.stringify(answer)}`);
    return answer;
  };
  // The platform pays the processing fees out of its own: without means a refund of the whole would wait.
  await control('POST', 'balance', { amount: 100_000 });
  const send = async (mail: SentMail) => {
    mails.push(mail);
  };
  const work = () => drainJobs(db, { send });
  const settle = async () => {
    for (let round = 0; round < 20; round += 1) {
      await control('POST', 'webhooks/flush');
      await work();
      const { data } = await control<{ data: { state: string; attempts: number }[] }>('GET', 'deliveries');
      // What our side refused waits for its later try and is not "left to do".
      if (!data.some((row) => row.state === 'waiting' && row.attempts === 0)) return;
    }
    throw new Error('webhooks and jobs did not come to an end');
  };
  return {
    test,
    db,
    payments,
    paymentsWith,
    stripe,
    url: running.url,
    webhookSecret: endpoint.secret ?? '',
    mails,
    webhooks,
    control,
    settle,
    work,
    advance: async (ms) => {
      await moveClock(db, ms);
    },
    async pay(milestoneId, card) {
      const rows = await db.select().from(paymentSession).where(eq(paymentSession.milestoneId, milestoneId));
      const session = rows.at(-1);
      if (!session?.sessionId) throw new Error('no payment page is open');
      await control('POST', `sessions/${session.sessionId}/pay`, card ? { card } : {});
      return session.sessionId;
    },
    async close() {
      usePaymentService(undefined);
      server.closeAllConnections();
      await new Promise((resolve) => server.close(resolve));
      await running.close();
      test.close();
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
}

export async function milestoneRow(db: Database, id: string) {
  const [row] = await db.select().from(milestone).where(eq(milestone.id, id));
  if (!row) throw new Error(`no milestone ${id}`);
  return row;
}
