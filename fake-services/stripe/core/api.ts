/** The API itself: key, version, idempotency, faults, then the route. */
import { randomBytes } from 'node:crypto';
import type { IncomingMessage, ServerResponse } from 'node:http';
import { ApiError, invalidParam, unauthenticated, unknownRoute } from './errors.ts';
import { expandObject } from './expand.ts';
import type { Fault, FaultList } from './faults.ts';
import { parseForm } from './form.ts';
import { sendJson, sendTorn } from './http.ts';
import { IdempotencyLayer } from './idempotency.ts';
import { matchRoute, type Route } from './router.ts';
import { API_VERSION, type PaymentService } from './service.ts';

interface Call {
  method: string;
  path: string;
  query: string;
  body: string;
  v2: boolean;
  requestId: string;
  key: string | null;
}

interface Answer {
  status: number;
  body: string;
  headers: Record<string, string>;
  /** Whether v1 keeps it for the key. */
  stored: boolean;
}

export interface LoggedCall {
  method: string;
  path: string;
  status: number | null;
  idempotencyKey: string | null;
  replayed: boolean;
  at: number;
}

const LOG_LENGTH = 2000;

function header(request: IncomingMessage, name: string): string | undefined {
  const value = request.headers[name];
  return Array.isArray(value) ? value[0] : value;
}

function keyOf(request: IncomingMessage): string | undefined {
  const given = header(request, 'authorization') ?? '';
  if (given.startsWith('Bearer ')) return given.slice(7).trim();
  if (given.startsWith('Basic ')) return Buffer.from(given.slice(6), 'base64').toString('utf8').split(':')[0];
  return undefined;
}

function paramsOf(call: Call): unknown {
  if (call.method === 'GET' || call.method === 'DELETE') return parseForm(call.query);
  if (!call.v2) return parseForm(call.body);
  if (call.body === '') return {};
  try {
    return JSON.parse(call.body) as unknown;
  } catch {
    throw invalidParam('invalid_json', 'The request body is not valid JSON.');
  }
}

function faultAnswer(fault: Fault): Answer | undefined {
  const make = (
    status: number,
    type: string,
    code: string | undefined,
    message: string,
    stored = false,
  ): Answer => ({
    status,
    body: JSON.stringify({ error: { type, ...(code === undefined ? {} : { code }), message } }),
    headers: {},
    stored,
  });
  switch (fault.kind) {
    case 'error-500':
    case 'error-500-after-effect':
      return make(500, 'api_error', undefined, 'Something went wrong on our side.', true);
    case 'unavailable-503':
      return make(503, 'api_error', undefined, 'The service is temporarily unavailable.');
    case 'rate-limit-429':
      return make(429, 'invalid_request_error', 'rate_limit', 'Too many requests. Back off and try again.');
    case 'lock-timeout-429':
      return make(
        429,
        'invalid_request_error',
        'lock_timeout',
        'This object cannot be accessed right now because another request is accessing it.',
      );
    case 'conflict-409':
      return make(
        409,
        'idempotency_error',
        'idempotency_key_in_use',
        'There is currently another in-progress request using this idempotency key.',
      );
    default:
      return undefined;
  }
}

export class Api {
  readonly log: LoggedCall[] = [];
  outage = false;
  latencyMs = 0;
  private readonly service: PaymentService;
  private readonly routes: Route[];
  private readonly faults: FaultList;
  private readonly acceptedKey: string;
  private readonly idempotency: IdempotencyLayer;

  constructor(service: PaymentService, routes: Route[], faults: FaultList, acceptedKey: string) {
    this.service = service;
    this.routes = routes;
    this.faults = faults;
    this.acceptedKey = acceptedKey;
    this.idempotency = new IdempotencyLayer(service.store);
  }

  async handle(
    request: IncomingMessage,
    response: ServerResponse,
    path: string,
    query: string,
    body: string,
  ): Promise<void> {
    const method = request.method ?? 'GET';
    const call: Call = {
      method,
      path,
      query,
      body,
      v2: path.startsWith('/v2/'),
      requestId: `req_${randomBytes(10).toString('hex').slice(0, 14)}`,
      key: method === 'GET' ? null : (header(request, 'idempotency-key') ?? null),
    };
    const entry: LoggedCall = {
      method,
      path,
      status: null,
      idempotencyKey: call.key,
      replayed: false,
      at: Date.now(),
    };
    this.log.push(entry);
    if (this.log.length > LOG_LENGTH) this.log.splice(0, this.log.length - LOG_LENGTH);
    if (this.outage) {
      request.socket.destroy();
      return;
    }
    const headers: Record<string, string> = { 'request-id': call.requestId, 'stripe-version': API_VERSION };
    if (call.key !== null) headers['idempotency-key'] = call.key;
    try {
      this.assertAllowed(request, call);
      await this.run(call, entry, request, response, headers);
    } catch (error) {
      const answer = this.errorAnswer(error);
      entry.status = answer.status;
      sendJson(response, answer.status, answer.body, { ...headers, ...answer.headers });
    }
  }

  private assertAllowed(request: IncomingMessage, call: Call): void {
    const key = keyOf(request);
    if (key === undefined || key === '') {
      throw unauthenticated('You did not provide an API key. Send it as Bearer or as the Basic user name.');
    }
    if (key !== this.acceptedKey) throw unauthenticated(`Invalid API Key provided: ${key.slice(0, 8)}****`);
    const version = header(request, 'stripe-version');
    if (version === undefined && call.v2)
      throw invalidParam('missing_version', 'v2 needs the Stripe-Version header.');
    if (version !== undefined && version !== API_VERSION) {
      throw invalidParam(
        undefined,
        `Invalid Stripe API version: ${version}. This stand-in speaks ${API_VERSION}.`,
      );
    }
  }

  private errorAnswer(error: unknown): Answer {
    if (error instanceof ApiError) {
      return {
        status: error.status,
        body: JSON.stringify({ error: error.body }),
        headers: error.headers,
        stored: error.stored,
      };
    }
    process.stderr.write(
      `payment stand-in: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`,
    );
    const body = JSON.stringify({
      error: { type: 'api_error', message: 'An unexpected error occurred in the stand-in.' },
    });
    return { status: 500, body, headers: {}, stored: false };
  }

  private async run(
    call: Call,
    entry: LoggedCall,
    request: IncomingMessage,
    response: ServerResponse,
    headers: Record<string, string>,
  ): Promise<void> {
    const matched = matchRoute(this.routes, call.method, call.path);
    if (matched === undefined) throw unknownRoute(call.method, call.path);
    const fingerprint = this.idempotency.fingerprint(call.method, call.path, call.body);
    const fault = this.faults.take(call.method, call.path);
    if (call.key !== null) {
      const known = this.idempotency.begin(call.key, fingerprint);
      if (known !== undefined) {
        entry.status = known.status;
        entry.replayed = true;
        const replay = { ...headers, 'idempotent-replayed': 'true', 'original-request': known.requestId };
        // A stored answer can be lost on its way like any other.
        const answer = { status: known.status, body: known.body, headers: {}, stored: false };
        this.answer(request, response, answer, fault, replay);
        return;
      }
    }
    try {
      const wait = this.latencyMs + (fault?.kind === 'delay' ? fault.delayMs : 0);
      if (wait > 0) await new Promise((resolve) => setTimeout(resolve, wait));
      const answer = this.perform(call, matched.route, matched.ids, fault);
      if (answer !== null && call.key !== null && this.keeps(call, answer)) {
        this.idempotency.keep({
          key: call.key,
          fingerprint,
          status: answer.status,
          body: answer.body,
          createdAt: this.service.now(),
          requestId: call.requestId,
        });
      }
      this.service.store.commit();
      entry.status = answer?.status ?? null;
      this.answer(request, response, answer, fault, headers);
    } finally {
      if (call.key !== null) this.idempotency.end(call.key);
    }
  }

  private keeps(call: Call, answer: Answer): boolean {
    return call.v2 ? answer.status < 400 : answer.stored;
  }

  /** Null when nothing is to be answered and nothing happened. */
  private perform(call: Call, route: Route, ids: string[], fault: Fault | undefined): Answer | null {
    if (fault?.kind === 'cut-before-effect' || fault?.kind === 'hang-before-effect') return null;
    const ordered = fault === undefined ? undefined : faultAnswer(fault);
    if (ordered !== undefined && fault?.kind !== 'error-500-after-effect') return ordered;
    const result = this.execute(call, route, ids);
    return ordered ?? result;
  }

  private execute(call: Call, route: Route, ids: string[]): Answer {
    this.service.request = { id: call.requestId, idempotencyKey: call.key };
    try {
      const params = paramsOf(call);
      const object = route.run(this.service, params, ids);
      const paths = expandPaths(call, params);
      const body = JSON.stringify(expandObject(this.service, object, paths));
      return { status: 200, body, headers: {}, stored: true };
    } catch (error) {
      return this.errorAnswer(error);
    } finally {
      this.service.request = null;
    }
  }

  private answer(
    request: IncomingMessage,
    response: ServerResponse,
    answer: Answer | null,
    fault: Fault | undefined,
    headers: Record<string, string>,
  ): void {
    switch (fault?.kind) {
      case 'cut-before-effect':
      case 'cut-after-effect':
        request.socket.destroy();
        return;
      case 'hang-before-effect':
      case 'hang-after-effect':
        return;
    }
    if (answer === null) return;
    const all = { ...headers, ...answer.headers };
    if (fault?.kind === 'cut-body') sendTorn(response, answer.status, answer.body, all);
    else sendJson(response, answer.status, answer.body, all);
  }
}

function expandPaths(call: Call, params: unknown): string[] | undefined {
  if (call.v2 || typeof params !== 'object' || params === null || !('expand' in params)) return undefined;
  return Array.isArray(params.expand) ? params.expand.map(String) : undefined;
}
