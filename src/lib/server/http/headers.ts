import type { Config } from '../config/index.ts';

/** Adds sources to a directive of a policy that has it; a directive that is not there is left alone. */
export function addSources(policy: string, directive: string, sources: readonly string[]): string {
  return policy
    .split(';')
    .map((part) => {
      const trimmed = part.trim();
      return trimmed === directive || trimmed.startsWith(`${directive} `)
        ? `${trimmed} ${sources.join(' ')}`
        : trimmed;
    })
    .filter((part) => part !== '')
    .join('; ');
}

/** Answers that are no page need no sources at all. */
const bareContentPolicy = "default-src 'none'; frame-ancestors 'none'; base-uri 'none'; form-action 'none'";

type HeaderConfig = Pick<Config, 'mode' | 'storage' | 'payments'>;

/**
 * The headers of every answer. Kit has set the fixed part of the content policy with its nonces; the
 * origins of file store and payment page are configuration and are added here.
 */
export function secureHeaders(
  headers: Headers,
  { mode, storage, payments }: HeaderConfig,
  options: { requestId: string; signedIn: boolean },
): void {
  const policy = headers.get('content-security-policy');
  if (policy) {
    const store = [storage.publicOrigin];
    let full = addSources(policy, 'connect-src', store);
    full = addSources(full, 'img-src', store);
    full = addSources(full, 'form-action', [payments.pageOrigin]);
    headers.set('content-security-policy', full);
  } else if (!headers.get('content-type')?.startsWith('text/html')) {
    headers.set('content-security-policy', bareContentPolicy);
  }
  headers.set('x-content-type-options', 'nosniff');
  headers.set('x-frame-options', 'DENY');
  // Other hosts hear our name only, never a path with a token. `no-referrer` would take the Origin from our
  // own forms as well, and they would be refused as foreign.
  headers.set('referrer-policy', 'strict-origin-when-cross-origin');
  headers.set('cross-origin-opener-policy', 'same-origin');
  headers.set('permissions-policy', 'camera=(), geolocation=(), microphone=(), payment=(), usb=()');
  if (mode === 'production') {
    headers.set('strict-transport-security', 'max-age=63072000; includeSubDomains');
  }
  headers.set('x-request-id', options.requestId);
  // What a signed-in person sees stays out of every shared or back-forward copy.
  if (options.signedIn && !headers.has('cache-control')) headers.set('cache-control', 'private, no-store');
}

/**
 * The address a request comes from: the connection's, or behind `hops` trusted proxies the entry that
 * the outermost of them added to X-Forwarded-For. What clients write there themselves is never read.
 */
export function clientAddress(connection: string, forwardedFor: string | null, hops: number): string {
  if (hops === 0 || !forwardedFor) return connection;
  const chain = forwardedFor
    .split(',')
    .map((part) => part.trim())
    .filter((part) => part !== '');
  return chain.at(-hops) ?? connection;
}
