/**
 * The stand-in of the payment service: speaks HTTP as the service does, keeps state, sends signed webhooks and
 * serves hosted pages. `startPaymentService` is what the command, the stack and the tests use.
 */
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http';
import type { AddressInfo } from 'node:net';
import { z } from 'zod';
import { control, type ControlContext } from './control.ts';
import { Api } from './core/api.ts';
import { Deliverer } from './core/delivery.ts';
import { ApiError } from './core/errors.ts';
import { FaultList } from './core/faults.ts';
import { BodyTooLarge, readBody, sendJson, sendText } from './core/http.ts';
import { PaymentService } from './core/service.ts';
import { Store } from './core/store.ts';
import { tick } from './core/ticks.ts';
import {
  showConfirmation,
  showSession,
  submitConfirmation,
  submitSession,
  type PageAnswer,
} from './pages/checkout-page.ts';
import { htmlPage } from './pages/layout.ts';
import { openOnboarding, submitOnboarding } from './pages/onboarding-page.ts';
import { accountLinkRoutes } from './resources/account-links.ts';
import { accountRoutes } from './resources/accounts.ts';
import { chargeRoutes } from './resources/charges.ts';
import { checkoutRoutes } from './resources/checkout-sessions.ts';
import { disputeRoutes } from './resources/disputes.ts';
import { eventingRoutes } from './resources/events.ts';
import { paymentIntentRoutes } from './resources/payment-intents.ts';
import { refundRoutes } from './resources/refunds.ts';
import { transferRoutes } from './resources/transfers.ts';

export interface PaymentServiceOptions {
  port: number;
  host?: string;
  /** Where the journal lives. */
  dataDir: string;
  /** The one key that is accepted. */
  apiKey?: string;
  seed?: string;
  /** Where browsers reach the hosted pages, when that differs from the listening address. */
  publicUrl?: string;
  payoutDelayDays?: number;
  accountLinkSeconds?: number;
  webhookRetryMs?: number[];
  tickMs?: number;
}

export interface RunningPaymentService {
  url: string;
  port: number;
  service: PaymentService;
  close: () => Promise<void>;
}

const ROUTES = [
  ...checkoutRoutes,
  ...paymentIntentRoutes,
  ...chargeRoutes,
  ...transferRoutes,
  ...refundRoutes,
  ...disputeRoutes,
  ...accountRoutes,
  ...accountLinkRoutes,
  ...eventingRoutes,
];

const PAGE_HEADERS = {
  'cache-control': 'no-store',
  'referrer-policy': 'no-referrer',
  'x-content-type-options': 'nosniff',
  // Forms end in a redirect to the platform, which form-action has to allow too.
  'content-security-policy':
    "default-src 'none'; style-src 'unsafe-inline'; img-src data:; form-action 'self' http: https:; base-uri 'none'; frame-ancestors 'none'",
};

function formOf(body: string): Record<string, string> {
  return Object.fromEntries(new URLSearchParams(body));
}

function page(service: PaymentService, method: string, path: string, body: string): PageAnswer | undefined {
  const [, kind, second, third] = path.split('/');
  const { tables } = service.store;
  if (kind === 'c' && second === 'pay') {
    const record = tables.sessions.get(third ?? '');
    if (record !== undefined)
      return method === 'POST' ? submitSession(service, record, formOf(body)) : showSession(record);
  }
  if (kind === 'confirm') {
    const intent = tables.intents.get(second ?? '');
    const record = intent?.session == null ? undefined : tables.sessions.get(intent.session);
    if (record !== undefined && intent?.pendingCard != null) {
      return method === 'POST' ? submitConfirmation(service, record, formOf(body)) : showConfirmation(record);
    }
  }
  if (kind === 'onboarding') {
    const link = tables.accountLinks.get(second ?? '');
    if (link !== undefined)
      return method === 'POST'
        ? submitOnboarding(service, link, formOf(body))
        : openOnboarding(service, link);
  }
  return undefined;
}

function sendPage(response: ServerResponse, answer: PageAnswer | undefined): void {
  if (answer?.location !== undefined) {
    sendText(response, answer.status, '', 'text/plain', { ...PAGE_HEADERS, location: answer.location });
    return;
  }
  const html =
    answer?.html ??
    htmlPage(
      'Not found',
      '<h1>There is no such page</h1><p>The link may be old. Go back and start again.</p>',
    );
  sendText(response, answer?.status ?? 404, html, 'text/html; charset=utf-8', PAGE_HEADERS);
}

async function sendControl(
  context: ControlContext,
  request: IncomingMessage,
  response: ServerResponse,
  path: string,
  body: string,
): Promise<void> {
  try {
    const result = await control(
      context,
      request.method ?? 'GET',
      path,
      body === '' ? {} : (JSON.parse(body) as unknown),
    );
    if (result === undefined) sendJson(response, 404, JSON.stringify({ error: 'no such control call' }));
    else sendJson(response, 200, JSON.stringify(result));
  } catch (error) {
    const status =
      error instanceof ApiError
        ? error.status
        : error instanceof z.ZodError || error instanceof SyntaxError
          ? 400
          : 500;
    const message =
      error instanceof z.ZodError
        ? z.prettifyError(error)
        : error instanceof Error
          ? error.message
          : String(error);
    sendJson(response, status, JSON.stringify({ error: message }));
  }
}

async function dispatch(
  context: ControlContext,
  request: IncomingMessage,
  response: ServerResponse,
): Promise<void> {
  const url = new URL(request.url ?? '/', 'http://stand-in');
  const path = url.pathname;
  const body = await readBody(request);
  if (path === '/health') sendJson(response, 200, '{"ok":true}');
  else if (path.startsWith('/_control/'))
    await sendControl(context, request, response, path.slice('/_control/'.length), body);
  else if (path.startsWith('/v1/') || path.startsWith('/v2/')) {
    await context.api.handle(request, response, path, url.search.slice(1), body);
  } else {
    const answer = page(context.service, request.method ?? 'GET', path, body);
    context.service.store.commit();
    sendPage(response, answer);
  }
}

function listen(server: Server, port: number, host: string): Promise<number> {
  return new Promise((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, host, () => resolve((server.address() as AddressInfo).port));
  });
}

/** Starts the stand-in; `port: 0` takes a free one. */
export async function startPaymentService(options: PaymentServiceOptions): Promise<RunningPaymentService> {
  const host = options.host ?? '127.0.0.1';
  const store = new Store(options.dataDir, options.seed ?? 'coilyard');
  const service = new PaymentService(store, {
    payoutDelayDays: options.payoutDelayDays ?? 2,
    accountLinkSeconds: options.accountLinkSeconds ?? 300,
  });
  const deliverer = new Deliverer(service, {
    retryDelaysMs: options.webhookRetryMs ?? [500, 1000, 2000, 5000, 15_000, 60_000],
    timeoutMs: 10_000,
  });
  const faults = new FaultList();
  const api = new Api(service, ROUTES, faults, options.apiKey ?? 'sk_test_coilyard_demo');
  const context: ControlContext = { service, api, deliverer, faults };
  const server = createServer((request, response) => {
    dispatch(context, request, response).catch((error: unknown) => {
      if (error instanceof BodyTooLarge)
        sendJson(response, 413, '{"error":{"type":"invalid_request_error","message":"Body too large"}}');
      else {
        process.stderr.write(`payment stand-in: ${error instanceof Error ? error.message : String(error)}\n`);
        response.destroy();
      }
    });
  });
  const port = await listen(server, options.port, host);
  const url = `http://${host}:${String(port)}`;
  service.publicUrl = options.publicUrl ?? url;
  const timer = setInterval(() => {
    tick(service);
    store.commit();
  }, options.tickMs ?? 250);
  timer.unref();
  return {
    url,
    port,
    service,
    close: async () => {
      clearInterval(timer);
      await deliverer.stop();
      server.closeAllConnections();
      await new Promise((resolve) => server.close(resolve));
      store.close();
    },
  };
}
