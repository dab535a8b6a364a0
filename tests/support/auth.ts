import type { RequestEvent } from '@sveltejs/kit';
import { sveltekitCookies } from 'better-auth/svelte-kit';
import type { Database } from '../../src/lib/server/db/index.ts';
import { config } from '../../src/lib/server/config/index.ts';
import { createAuth, type SignInContext } from '../../src/lib/server/auth/index.ts';
import { drainMails, type ReceivedMail } from './mail.ts';

export interface SetCookie {
  name: string;
  value: string;
  options: Record<string, unknown>;
}

export interface Browser extends SignInContext {
  /** Cookies by name, as the browser would keep them. */
  cookies: Map<string, string>;
  /** The cookies that were set, newest last. */
  setCookies: SetCookie[];
  mails(): Promise<ReceivedMail[]>;
  /** The headers of the next request. */
  fresh(): Headers;
}

/**
 * A browser without a network: calls the use-cases of signing in with its cookies and keeps those they
 * set, by the same cookie plugin as the application.
 */
export function aBrowser(db: Database, address = '192.0.2.7'): Browser {
  const cookies = new Map<string, string>();
  const setCookies: SetCookie[] = [];
  // The cookie plugin of the application; only the event it writes to is ours.
  const event = {
    cookies: {
      set(name: string, value: string, options: { maxAge?: number } & Record<string, unknown>) {
        setCookies.push({ name, value, options });
        if (options.maxAge === 0) cookies.delete(name);
        else cookies.set(name, encodeURIComponent(value));
        browser.headers = browser.fresh();
      },
    },
  };
  const auth = createAuth({
    db,
    config: config(),
    plugins: [sveltekitCookies((() => event) as unknown as () => RequestEvent)],
  });
  const browser: Browser = {
    db,
    auth,
    address,
    requestId: 'test',
    cookies,
    setCookies,
    headers: new Headers(),
    mails: () => drainMails(db),
    fresh: () =>
      new Headers({
        cookie: [...cookies].map(([name, value]) => `${name}=${value}`).join('; '),
        'x-client-ip': address,
        'user-agent': 'test browser',
      }),
  };
  browser.headers = browser.fresh();
  return browser;
}
