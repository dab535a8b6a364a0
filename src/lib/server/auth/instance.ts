import type { Auth } from './create.ts';
import type { SignInContext } from './flows.ts';
import { database } from '../db/index.ts';

let shared: Auth | undefined;

/** The web application hands over the instance that holds its cookie plugin. */
export function provideAuth(auth: Auth): void {
  shared = auth;
}

export function auth(): Auth {
  if (!shared) throw new Error('sign-in was not set up by the entry point');
  return shared;
}

/** What the flows need, from the event of a page. */
export function signInContext(event: {
  request: Request;
  locals: { address: string; requestId: string };
}): SignInContext {
  return {
    db: database(),
    auth: auth(),
    headers: event.request.headers,
    address: event.locals.address,
    requestId: event.locals.requestId,
  };
}
