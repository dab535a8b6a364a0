/** The steps of an order as people do them in the browser; each waits for what the page then shows. */
import type { Page } from '@playwright/test';
import { eq } from 'drizzle-orm';
import { exampleRequirement } from '../../src/lib/schemas/api/examples.ts';
import { dayMs } from '../../src/lib/domain/dates.ts';
import { moveClock } from '../../src/lib/server/adapters/clock.ts';
import { database } from '../../src/lib/server/db/index.ts';
import { company } from '../../src/lib/server/db/schema/companies.ts';
import { user } from '../../src/lib/server/db/schema/auth.ts';
import { anOwner, aWord } from './e2e-people.ts';
import { expect, payByCard, signIn } from './e2e.ts';
import { aPdf } from './files.ts';

export type Owner = Awaited<ReturnType<typeof anOwner>>;

/** A verified fabricator whose owner has every role. Verifying by the admin's pages has a test of its own. */
export async function aVerifiedShop(): Promise<Owner> {
  const shop = await anOwner('fabricator');
  await database()
    .update(company)
    .set({ verifiedUntil: Date.now() + 400 * dayMs })
    .where(eq(company.id, shop.companyId));
  return shop;
}

export async function useInches(owner: Owner, currency: 'EUR' | 'USD' | 'GBP'): Promise<void> {
  await database().update(user).set({ unitSet: 'inch' }).where(eq(user.id, owner.actor.userId));
  await database().update(company).set({ currency }).where(eq(company.id, owner.companyId));
}

/** Moves business time; only for specs that run alone. */
export async function daysLater(days: number): Promise<void> {
  await moveClock(database(), days * dayMs);
}

/** The owner sets up the payout account on the stand-in's page and comes back. */
export async function onboardPayouts(page: Page, shop: Owner): Promise<void> {
  await page.goto(`/companies/${shop.companyId}/payouts`);
  const country = page.getByLabel('Country of the company');
  if (await country.isVisible()) await country.selectOption('DE');
  await page.locator('main button[type="submit"]').first().click();
  await page.getByLabel('Bank account (IBAN)').fill('DE89370400440532013000');
  await page.locator('#submit').click();
  await page.waitForURL(/\/payouts/);
  await expect(page.getByText(/can receive/i).first()).toBeVisible({ timeout: 30_000 });
}

/** Begins a request from the JSON of the API, gives it its terms, has it checked, and posts it. */
export async function postRequest(
  page: Page,
  terms: { title: string; inspectionDays: string; quantity?: string },
): Promise<string> {
  await page.goto('/requests/new');
  await page.getByRole('radio', { name: 'A requirement as JSON' }).check();
  await page.locator('textarea[name="json"]').fill(JSON.stringify(exampleRequirement()));
  await page.getByRole('button', { name: 'Begin the draft' }).click();
  await page.waitForURL(/compose/);
  const fill = async (name: string, text: string) => {
    const field = page.locator(`[name="${name}"]:not([type="hidden"])`);
    await field.fill(text);
    await field.blur();
  };
  await fill('title', terms.title);
  await fill('commercial.deliveryPlace', 'Works 2, gate B');
  await fill('commercial.inspectionDays', terms.inspectionDays);
  await expect(page.getByText('confirmed by the server').first()).toBeVisible({ timeout: 120_000 });
  const acknowledge = page.getByRole('button', { name: 'Acknowledge', exact: true });
  for (let left = await acknowledge.count(); left > 0; left -= 1) {
    await acknowledge.first().click();
    await expect(acknowledge).toHaveCount(left - 1);
  }
  await page.getByRole('button', { name: 'Post the request' }).click();
  const dialog = page.getByRole('dialog');
  await expect(dialog).toBeVisible({ timeout: 60_000 });
  await dialog.getByRole('button', { name: 'Post it' }).click();
  await expect(page.getByText('Open for bids')).toBeVisible({ timeout: 30_000 });
  return new URL(page.url()).pathname;
}

/** Bids on the request's page, with one exception when told. */
export async function handInBid(
  page: Page,
  requestPath: string,
  bid: { coil: string; freight: string; tax?: string; exception?: string },
): Promise<void> {
  await page.goto(`${requestPath}/bid`);
  await page.locator('[name="price.coil"]').fill(bid.coil);
  await page.locator('[name="price.freight"]').fill(bid.freight);
  if (bid.tax) {
    await page.locator('[name="tax.0.kind"]').selectOption('vat');
    await page.locator('[name="tax.0.amount"]').fill(bid.tax);
  }
  await page.locator('[name="leadTime"]').fill('15');
  if (bid.exception) {
    await page.locator('[name="exception.0.subject"]').fill('Leads and connection');
    await page.locator('[name="exception.0.text"]').fill(bid.exception);
  }
  await page.getByRole('button', { name: 'Hand in the bid' }).click();
  await expect(page.getByText('Submitted', { exact: true })).toBeVisible();
}

/** Accepts what is open of the exceptions and awards to the named bidder; returns the order's path. */
export async function award(page: Page, requestPath: string, bidder: string): Promise<string> {
  await page.goto(`${requestPath}/compare`);
  const accept = page.getByRole('button', { name: 'Accept', exact: true });
  for (let left = await accept.count(); left > 0; left -= 1) {
    await accept.first().click();
    await expect(accept).toHaveCount(left - 1);
  }
  await page.getByRole('link', { name: `Award to ${bidder}` }).click();
  await page.getByRole('button', { name: 'Award this bid' }).click();
  await page.waitForURL(/\/orders\//);
  return new URL(page.url()).pathname;
}

/** Pays a milestone on the stand-in's page and waits until the webhook has made the money held. */
export async function fund(page: Page, orderPath: string, kind: 'drawing' | 'build' | 'delivery') {
  await page.goto(orderPath);
  await page
    .getByRole('link', { name: `Fund ${kind}` })
    .first()
    .click();
  await page.getByRole('button', { name: 'Go to the payment page' }).click();
  await expect(page.getByLabel('Card number')).toBeVisible();
  await payByCard(page);
  await page.waitForURL((url) => url.pathname === orderPath);
  await expect(async () => {
    await page.goto(orderPath);
    await expect(page.getByRole('link', { name: `Fund ${kind}` })).toHaveCount(0, { timeout: 500 });
  }).toPass({ timeout: 30_000 });
}

export async function release(page: Page, orderPath: string, kind: 'drawing' | 'build' | 'delivery') {
  await page.goto(orderPath);
  await page
    .getByRole('link', { name: `Release ${kind}` })
    .first()
    .click();
  await page.getByRole('button', { name: 'Release', exact: false }).click();
  await page.waitForURL((url) => url.pathname === orderPath);
  await expect(async () => {
    await page.goto(orderPath);
    await expect(
      page.locator('[id^="milestone-"]', { hasText: new RegExp(kind, 'i') }).first(),
    ).toContainText('released', { timeout: 500 });
  }).toPass({ timeout: 30_000 });
}

/** Uploads a real PDF and submits it as the next drawing revision. */
export async function submitDrawing(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  const section = page.locator('#drawings');
  await section
    .getByLabel('Drawing of the coil', { exact: true })
    .setInputFiles({ name: 'coil.pdf', mimeType: 'application/pdf', buffer: Buffer.from(aPdf(aWord())) });
  await expect(section.locator('[data-upload="done"]')).toBeVisible();
  await section.getByRole('button', { name: 'Submit for approval' }).click();
  await expect(section.getByText('Revision A')).toBeVisible();
}

export async function approveDrawing(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  await page.getByRole('button', { name: 'Approve revision A' }).click();
  await expect(page.locator('#drawings').getByText('approved').first()).toBeVisible();
}

/** Enters the as-built record of every piece with values inside their limits, and submits the build. */
export async function recordAndSubmit(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  const links = await page
    .locator('#pieces a[href*="/pieces/"]')
    .evaluateAll((all) => all.map((one) => one.getAttribute('href') ?? ''));
  for (const href of new Set(links)) {
    await page.goto(href);
    await page.locator('[name="measuredOn"]').fill(new Date().toISOString().slice(0, 10));
    for (const input of await page.locator('input[name^="value-"]').all()) {
      // The section says the limits ("771 nH to 850 nH"); a value in their middle is typed as a shop would.
      const words = await input.evaluate((field) => field.closest('section')?.textContent ?? '');
      const limits = [
        ...words.replace(/\u00a0/g, ' ').matchAll(/(\d+(?:\.\d+)?) (nH|µH|mm|in|bar|psi|mΩ|µΩ)/g),
      ];
      const numbers = limits.slice(0, 2).map((match) => Number(match[1]));
      const unit = limits[0]?.[2] ?? '';
      const middle = numbers.reduce((a, b) => a + b, 0) / numbers.length;
      await input.fill(`${middle} ${unit}`);
    }
    for (const select of await page.locator('select[name^="passed-"]').all())
      await select.selectOption('yes');
    await page.getByRole('button', { name: 'Enter the record' }).click();
    await page.waitForURL((url) => url.pathname === orderPath);
  }
  await expect(page.locator('#pieces').getByText('pass').first()).toBeVisible();
  await page.getByRole('button', { name: 'Submit build' }).click();
  await expect(page.getByRole('button', { name: 'Submit build' })).toHaveCount(0);
}

export async function acceptEvidence(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  await page.getByRole('button', { name: 'Accept the evidence' }).first().click();
  await expect(page.getByRole('button', { name: 'Accept the evidence' })).toHaveCount(0);
}

export async function ship(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  const section = page.locator('#delivery');
  await section.getByLabel('Carrier').fill('Parcel service');
  await section.getByLabel('Consignment number').fill(`PS-${aWord()}`);
  const day = section.getByLabel('Handed over on');
  if ((await day.inputValue()) === '') await day.fill(new Date().toISOString().slice(0, 10));
  await section.getByRole('button', { name: 'Enter the shipment' }).click();
  await expect(section.getByText('Parcel service')).toBeVisible();
}

export async function confirmReceipt(page: Page, orderPath: string): Promise<void> {
  await page.goto(orderPath);
  await page.getByRole('button', { name: 'Confirm the receipt' }).click();
  await expect(page.getByRole('button', { name: 'Confirm the receipt' })).toHaveCount(0);
}

export { signIn };
