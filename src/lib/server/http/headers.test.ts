import { expect, test } from 'vitest';
import { loadConfig } from '../config/index.ts';
import { addSources, clientAddress, secureHeaders } from './headers.ts';

const production = {
  COILYARD_MODE: 'production',
  AUTH_SECRET: 'x'.repeat(40),
  STRIPE_SECRET_KEY: 'sk_live_example',
  STRIPE_WEBHOOK_SECRET: 'whsec_example_a',
  STRIPE_ACCOUNT_WEBHOOK_SECRET: 'whsec_example_b',
  S3_SECRET_ACCESS_KEY: 'example-secret',
  S3_PUBLIC_ENDPOINT: 'https://files.works.example/bucket',
  PAYMENT_PAGE_ORIGIN: 'https://pay.works.example/',
};
const options = { requestId: 'r-1', signedIn: false };

test('the file store may be connected to and shown, the payment page may be posted to, nothing else changes', () => {
  const headers = new Headers({
    'content-type': 'text/html',
    'content-security-policy':
      "default-src 'self'; connect-src 'self'; img-src 'self' data:; script-src 'self' 'nonce-abc'; form-action 'self'",
  });
  secureHeaders(headers, loadConfig(production), options);
  expect(headers.get('content-security-policy')).toBe(
    "default-src 'self'; connect-src 'self' https://files.works.example; img-src 'self' data: https://files.works.example; script-src 'self' 'nonce-abc'; form-action 'self' https://pay.works.example",
  );
});

test('https is insisted on in production only', () => {
  const there = new Headers();
  secureHeaders(there, loadConfig(production), options);
  expect(there.get('strict-transport-security')).toMatch(/max-age=63072000/);
  const demo = new Headers();
  secureHeaders(demo, loadConfig({}), options);
  expect(demo.get('strict-transport-security')).toBeNull();
  expect(demo.get('x-content-type-options')).toBe('nosniff');
  expect(demo.get('x-request-id')).toBe('r-1');
});

test('answers to signed-in people are not kept by caches, unless they say otherwise', () => {
  const page = new Headers();
  secureHeaders(page, loadConfig({}), { ...options, signedIn: true });
  expect(page.get('cache-control')).toBe('private, no-store');
  const own = new Headers({ 'cache-control': 'public, max-age=60' });
  secureHeaders(own, loadConfig({}), { ...options, signedIn: true });
  expect(own.get('cache-control')).toBe('public, max-age=60');
});

test('data answers get a policy that allows nothing', () => {
  const headers = new Headers({ 'content-type': 'application/json' });
  secureHeaders(headers, loadConfig({}), options);
  expect(headers.get('content-security-policy')).toMatch(/default-src 'none'/);
});

test('a directive is matched by its whole name', () => {
  expect(addSources("style-src-attr 'x'; style-src 'self'", 'style-src', ['https://a.example'])).toBe(
    "style-src-attr 'x'; style-src 'self' https://a.example",
  );
});

test('an address that a client claims for itself is not believed', () => {
  expect(clientAddress('10.0.0.1', '1.1.1.1', 0)).toBe('10.0.0.1');
  expect(clientAddress('10.0.0.1', '1.1.1.1, 203.0.113.5', 1)).toBe('203.0.113.5');
  expect(clientAddress('10.0.0.1', '1.1.1.1, 203.0.113.5, 10.0.0.9', 2)).toBe('203.0.113.5');
  expect(clientAddress('10.0.0.1', null, 2)).toBe('10.0.0.1');
  expect(clientAddress('10.0.0.1', '203.0.113.5', 3)).toBe('10.0.0.1');
});
