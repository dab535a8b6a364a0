import { building } from '$app/environment';
import { getRequestEvent } from '$app/server';
import { auth, createAuth, provideAuth, resolveVisitor, sessionCookie } from '$lib/server/auth/index.ts';
import { config, ConfigError } from '$lib/server/config/index.ts';
import { database } from '$lib/server/db/index.ts';
import { waitForMigrations } from '$lib/server/db/migrate.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { clientAddress, secureHeaders } from '$lib/server/http/headers.ts';
import { log } from '$lib/server/log/index.ts';
import type { Handle, HandleServerError, ServerInit } from '@sveltejs/kit';
import { sveltekitCookies } from 'better-auth/svelte-kit';

export const init: ServerInit = async () => {
  if (building) return;
  try {
    const settings = config();
    await waitForMigrations(database(), settings.database.migrationsDir);
    provideAuth(
      createAuth({ db: database(), config: settings, plugins: [sveltekitCookies(getRequestEvent)] }),
    );
  } catch (problem) {
    process.stderr.write(`${problem instanceof Error ? problem.message : String(problem)}\n`);
    process.exit(problem instanceof ConfigError ? 2 : 3);
  }
};

/** Pages and endpoints that are the same for everyone: no session is looked up for them. */
const withoutSession = [
  /^\/$/,
  /^\/bench$/,
  /^\/styleguide/,
  /^\/\(public\)/,
  /^\/api\/health$/,
  /^\/api\/webhooks\//,
];

export const handle: Handle = async ({ event, resolve }) => {
  event.locals.actor = null;
  event.locals.session = null;
  event.locals.sessionId = null;
  event.locals.requestId = newId();
  event.locals.address = 'unknown';
  if (building) return resolve(event);

  const started = performance.now();
  const { requestId } = event.locals;
  const settings = config();
  event.locals.address = clientAddress(
    event.getClientAddress(),
    event.request.headers.get('x-forwarded-for'),
    settings.trustedProxyHops,
  );
  // Sign-in reads the address from this header only; whatever came in under its name is overwritten.
  event.request.headers.set('x-client-ip', event.locals.address);

  const routeId = event.route.id;
  const wantsSession = routeId !== null && !withoutSession.some((pattern) => pattern.test(routeId));
  if (wantsSession && event.cookies.get(sessionCookie)) {
    const visitor = await resolveVisitor(database(), auth(), event.request.headers, requestId);
    event.locals.actor = visitor?.actor ?? null;
    event.locals.session = visitor?.session ?? null;
    event.locals.sessionId = visitor?.session.id ?? null;
  }

  const response = await resolve(event);
  secureHeaders(response.headers, settings, { requestId, signedIn: event.locals.actor !== null });
  log().info(
    {
      requestId,
      method: event.request.method,
      // The pattern, not the path: paths may carry tokens.
      route: routeId,
      status: response.status,
      ms: Math.round(performance.now() - started),
    },
    'request',
  );
  return response;
};

export const handleError: HandleServerError = ({ error, event, status, message }) => {
  const { requestId } = event.locals;
  if (status === 404)
    return { message: 'There is nothing here, or it is not yours to see.', code: 'not-found', requestId };
  if (status === 413) return { message: 'That is larger than allowed.', code: 'too-large', requestId };
  if (status < 500) return { message, requestId };
  log().error(
    {
      requestId,
      route: event.route.id,
      error:
        error instanceof Error
          ? { name: error.name, message: error.message, stack: error.stack }
          : String(error),
    },
    'unexpected error',
  );
  return {
    message: 'Something went wrong on our side. Nothing you entered was changed by it.',
    code: 'unexpected',
    requestId,
  };
};
