import { isActionFailure, isHttpError, isRedirect, type Cookies, type RequestEvent } from '@sveltejs/kit';
import type { Actor } from '../../src/lib/domain/actor.ts';
import { loadModule, type RouteHandler } from './routes.ts';

export interface Outcome {
  /** `refused`: sent to sign in, not allowed, or nothing there; `stopped`: what was sent is not valid. */
  kind: 'let in' | 'refused' | 'stopped';
  status: number;
  note: string;
}

export interface Call {
  actor: Actor | null;
  params: Record<string, string>;
  body?: { form: Record<string, string | string[]> } | { json: unknown };
  query?: string;
}

const origin = 'http://localhost:3000';

function pathOf(route: string, params: Record<string, string>): string {
  return (
    route
      .replace(/\/\([^)]+\)/g, '')
      .replace(/\[+(?:\.\.\.)?([^\]=]+)(?:=[^\]]+)?\]+/g, (_all, name: string) => params[name] ?? '') || '/'
  );
}

function requestFor(handler: string, url: URL, call: Call): Request {
  const method = handler.startsWith('action:') ? 'POST' : /^[A-Z]+$/.test(handler) ? handler : 'GET';
  const headers = new Headers({ origin, 'x-client-ip': '192.0.2.1' });
  if (method === 'GET' || method === 'HEAD') return new Request(url, { method, headers });
  if (call.body && 'json' in call.body) {
    headers.set('content-type', 'application/json');
    return new Request(url, { method, headers, body: JSON.stringify(call.body.json) });
  }
  if (!handler.startsWith('action:')) {
    headers.set('content-type', 'application/json');
    return new Request(url, { method, headers, body: '{}' });
  }
  const form = new URLSearchParams();
  for (const [name, value] of Object.entries(call.body?.form ?? {})) {
    for (const one of Array.isArray(value) ? value : [value]) form.append(name, one);
  }
  return new Request(url, { method, headers, body: form });
}

function eventFor(target: RouteHandler, call: Call): RequestEvent {
  const url = new URL(`${origin}${pathOf(target.route, call.params)}${call.query ?? ''}`);
  const jar = new Map<string, string>();
  const cookies = {
    get: (name: string) => jar.get(name),
    getAll: () => [...jar].map(([name, value]) => ({ name, value })),
    set: (name: string, value: string) => void jar.set(name, value),
    delete: (name: string) => void jar.delete(name),
    serialize: () => '',
  } as unknown as Cookies;
  const session = call.actor
    ? { id: `session-${call.actor.userId}`, freshUntil: Date.now() + 600_000 }
    : null;
  const event = {
    url,
    params: call.params,
    route: { id: target.route },
    request: requestFor(target.handler, url, call),
    cookies,
    locals: {
      actor: call.actor,
      session,
      sessionId: session?.id ?? null,
      requestId: 'matrix',
      address: '192.0.2.1',
    },
    getClientAddress: () => '192.0.2.1',
    setHeaders: () => undefined,
    isDataRequest: false,
    isSubRequest: false,
    isRemoteRequest: false,
    platform: undefined,
    fetch: () => Promise.reject(new Error('the matrix has no network')),
    parent: () => Promise.resolve({}),
    depends: () => undefined,
    untrack: <T>(work: () => T) => work(),
  };
  return event as unknown as RequestEvent;
}

function judge(status: number, note: string, location?: string): Outcome {
  if (location !== undefined) {
    const toSignIn = location.startsWith('/sign-in?next=');
    return { kind: toSignIn ? 'refused' : 'let in', status, note: `→ ${location}` };
  }
  if ([401, 403, 404].includes(status)) return { kind: 'refused', status, note };
  if ([400, 413, 415, 422].includes(status)) return { kind: 'stopped', status, note };
  return { kind: 'let in', status, note };
}

type Handler = (event: RequestEvent) => unknown;

/** Calls one handler as one person and tells what became of it. A crash counts as let in: nothing refused. */
export async function call(target: RouteHandler, input: Call): Promise<Outcome> {
  const module = await loadModule(target.file);
  const handler = (
    target.handler.startsWith('action:')
      ? module.actions?.[target.handler.slice('action:'.length)]
      : module[target.handler === 'layout' ? 'load' : target.handler]
  ) as Handler;
  try {
    const result = await handler(eventFor(target, input));
    if (result instanceof Response) {
      const location = result.headers.get('location') ?? undefined;
      return judge(result.status, '', location);
    }
    if (isActionFailure(result)) {
      const data = result.data as { code?: string } | undefined;
      return judge(result.status, data?.code ?? '');
    }
    return judge(200, '');
  } catch (problem) {
    if (isRedirect(problem)) return judge(problem.status, '', problem.location);
    if (isHttpError(problem)) return judge(problem.status, problem.body.message);
    return judge(
      500,
      problem instanceof Error ? `${problem.name}: ${problem.message.slice(0, 80)}` : 'crash',
    );
  }
}
