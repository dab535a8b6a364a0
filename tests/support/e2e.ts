/**
 * What every browser test uses instead of Playwright's own `test`: a page on which errors in the console,
 * violations of the content security policy and failed requests fail the test.
 */
import { readFileSync } from 'node:fs';
import path from 'node:path';
import { test as base, expect, type BrowserContext, type Page } from '@playwright/test';
import { z } from 'zod';
import { waitForMailAt, type MailQuery, type ReceivedMail } from './maildev.ts';
import { stackInfo } from './stack-info.ts';

export { expect };

export class TroubleLog {
  readonly seen: string[] = [];
  private readonly allowed: RegExp[] = [];

  /** For a test that provokes an error on purpose: says which. */
  allow(...patterns: RegExp[]): void {
    this.allowed.push(...patterns);
  }

  note(what: string): void {
    this.seen.push(what);
  }

  /** What nobody expected. */
  unexpected(): string[] {
    return this.seen.filter((line) => !this.allowed.some((pattern) => pattern.test(line)));
  }
}

/** Listens to every page of the context, popups included. */
export async function watch(context: BrowserContext, log: TroubleLog): Promise<void> {
  await context.exposeFunction('__policyViolation', (what: string) => log.note(`policy: ${what}`));
  await context.addInitScript(() => {
    document.addEventListener('securitypolicyviolation', (event) => {
      const report: unknown = Reflect.get(window, '__policyViolation');
      if (typeof report === 'function')
        report(`${event.effectiveDirective} blocked ${event.blockedURI} on ${location.pathname}`);
    });
  });
  context.on('console', (message) => {
    if (message.type() === 'error') log.note(`console: ${message.text()} (${message.location().url})`);
  });
  context.on('weberror', (error) => log.note(`page error: ${error.error().message}`));
  context.on('requestfailed', (request) => {
    const reason = request.failure()?.errorText ?? '';
    // The browser gives up what it no longer needs when it leaves a page.
    if (reason !== 'net::ERR_ABORTED')
      log.note(`request failed: ${request.method()} ${request.url()} ${reason}`);
  });
  context.on('response', (response) => {
    if (response.status() >= 500) log.note(`status ${String(response.status())}: ${response.url()}`);
  });
}

export const test = base.extend<{ trouble: TroubleLog }>({
  trouble: [
    async ({ context }, use) => {
      const log = new TroubleLog();
      await watch(context, log);
      await use(log);
      expect(log.unexpected(), 'errors in the console, blocked by policy, or failed requests').toEqual([]);
    },
    { auto: true },
  ],
});

/** The newest mail to this address with this subject, as soon as it has arrived. */
export function waitForMail(query: MailQuery): Promise<ReceivedMail> {
  return waitForMailAt(stackInfo().mailUrl, query);
}

const signInsSchema = z.array(
  z.object({ role: z.string(), email: z.string(), password: z.string(), note: z.string().optional() }),
);
export type SignIn = z.output<typeof signInsSchema>[number];

/** A sign-in of the seeded data by a part of its role or address. */
export function seededSignIn(which: string): SignIn {
  const file = path.join(stackInfo().dataDir, 'sign-ins.json');
  const all = signInsSchema.parse(JSON.parse(readFileSync(file, 'utf8')));
  const found = all.find((one) => `${one.role} ${one.email}`.toLowerCase().includes(which.toLowerCase()));
  if (found === undefined)
    throw new Error(`No sign-in fits "${which}": ${all.map((one) => one.role).join(', ')}`);
  return found;
}

/** Signs in on the page for it and waits until the page has been left. */
export async function signIn(page: Page, who: { email: string; password: string }): Promise<void> {
  await page.goto('/sign-in');
  await page.locator('input[name="email"]').fill(who.email);
  await page.locator('input[name="password"]').fill(who.password);
  await page.locator('form:has(input[name="password"]) button[type="submit"]').first().click();
  await page.waitForURL((url) => !url.pathname.startsWith('/sign-in'));
}

/** A call under `/_control` of the payment stand-in. */
export async function paymentControl(
  method: 'GET' | 'POST' | 'DELETE',
  call: string,
  body?: object,
): Promise<unknown> {
  const response = await fetch(`${stackInfo().paymentsUrl}/_control/${call}`, {
    method,
    ...(body === undefined
      ? {}
      : { body: JSON.stringify(body), headers: { 'content-type': 'application/json' } }),
  });
  const answer: unknown = await response.json();
  if (!response.ok) throw new Error(`payment control ${call}: ${JSON.stringify(answer)}`);
  return answer;
}

/** Pays on the hosted page that the browser is on. */
export async function payByCard(page: Page, card = '4242 4242 4242 4242'): Promise<void> {
  await page.getByLabel('Card number').fill(card);
  await page.getByLabel('Expiry').fill('12/34');
  await page.getByLabel('Security code').fill('123');
  await page.locator('#pay').click();
}
