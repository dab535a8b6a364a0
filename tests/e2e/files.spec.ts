import { readFileSync, writeFileSync } from 'node:fs';
import type { Page } from '@playwright/test';
import { expectAccessible } from '../support/axe.ts';
import { anOwner } from '../support/e2e-people.ts';
import { expect, signIn, test } from '../support/e2e.ts';
import { aPdf } from '../support/files.ts';

const pdf = (name: string, bytes: Uint8Array) => ({
  name,
  mimeType: 'application/pdf',
  buffer: Buffer.from(bytes),
});

/** A PDF of more than 16 MB: what lies between its end marks is a comment. */
function largePdf(): Uint8Array {
  const all = new Uint8Array(18_000_000).fill(0x20);
  all.set(aPdf('large'));
  all.set(new TextEncoder().encode('\n%%EOF\n'), all.length - 7);
  return all;
}

async function documentsOfANewShop(page: Page) {
  const owner = await anOwner('fabricator');
  await signIn(page, owner);
  await page.goto(`/companies/${owner.companyId}/documents`);
  return owner;
}

async function addDocument(page: Page, title: string): Promise<string> {
  await page.getByLabel('What it is').fill(title);
  await page.getByLabel('Kind').selectOption('registration');
  await page.getByRole('button', { name: 'Add the document' }).click();
  const link = page.getByRole('link', { name: title });
  await expect(link).toBeVisible();
  return (await link.getAttribute('href')) ?? '';
}

const uploaded = (page: Page) => page.locator('[data-upload="done"]');

test('a PDF goes from the browser to the store, is listed, and comes back under its name', async ({
  page,
}) => {
  await documentsOfANewShop(page);
  const bytes = aPdf('register');
  await page.getByLabel('File', { exact: true }).setInputFiles(pdf('Auszug Ø 40.pdf', bytes));
  await expect(uploaded(page)).toContainText('Auszug Ø 40.pdf');
  await expect(page.getByRole('status').filter({ hasText: 'uploaded and checked' })).toHaveCount(1);
  await expectAccessible(page);
  await addDocument(page, 'Register extract');
  await expect(uploaded(page)).toHaveCount(0);
  const [download] = await Promise.all([
    page.waitForEvent('download'),
    page.getByRole('link', { name: 'Register extract' }).click(),
  ]);
  expect(download.suggestedFilename()).toBe('Auszug Ø 40.pdf');
  expect(readFileSync(await download.path()).equals(Buffer.from(bytes))).toBe(true);
  await page.getByRole('button', { name: 'Archive Register extract' }).click();
  await expect(page.getByRole('link', { name: 'Register extract' })).toHaveCount(0);
  await page.getByRole('link', { name: 'Archived' }).click();
  await expect(page.getByRole('link', { name: 'Register extract' })).toBeVisible();
});

test('an SVG called PNG is refused in plain words, and the form asks for a file', async ({ page }) => {
  await documentsOfANewShop(page);
  const svg = '<svg xmlns="http://www.w3.org/2000/svg"><script>alert(1)</script></svg>';
  await page
    .getByLabel('File', { exact: true })
    .setInputFiles({ name: 'logo.png', mimeType: 'image/png', buffer: Buffer.from(svg) });
  const item = page.locator('[data-upload="failed"]');
  await expect(item).toContainText('The name says PNG, but the content is no PNG file');
  await expect(item.getByRole('button', { name: 'Go on' })).toHaveCount(0);
  await page.getByLabel('What it is').fill('Our logo');
  await page.getByRole('button', { name: 'Add the document' }).click();
  await expect(page.getByRole('alert')).toContainText('Upload the file first');
  await expect(page).toHaveTitle(/^Error: /);
  await expect(page.getByLabel('What it is')).toHaveValue('Our logo');
  await expectAccessible(page);
});

test('a file of a kind that is not taken is refused before it is sent', async ({ page, trouble }) => {
  trouble.allow(/status of 415/);
  await documentsOfANewShop(page);
  await page
    .getByLabel('File', { exact: true })
    .setInputFiles({ name: 'page.html', mimeType: 'text/html', buffer: Buffer.from('<p>') });
  await expect(page.locator('[data-upload="failed"]')).toContainText(
    'This takes PDF, PNG, JPEG or WebP files.',
  );
});

test('a large file goes in parts, stops with the connection, and goes on, also after a reload', async ({
  page,
  trouble,
}, testInfo) => {
  trouble.allow(/ERR_(CONNECTION_RESET|FAILED)/);
  await documentsOfANewShop(page);
  let sent: number[] = [];
  let broken = 2;
  await page.route(/partNumber=\d/, async (route) => {
    if (route.request().method() !== 'PUT') return route.continue();
    const number = Number(new URL(route.request().url()).searchParams.get('partNumber'));
    if (number === broken) return route.abort('connectionreset');
    sent.push(number);
    return route.continue();
  });
  // On disk, so that it is the same file after the reload: name, size and date.
  const file = testInfo.outputPath('large.pdf');
  writeFileSync(file, largePdf());
  const field = page.getByLabel('File', { exact: true });
  const failed = page.locator('[data-upload="failed"]');
  await field.setInputFiles(file);
  await expect(failed).toContainText('The connection was lost', { timeout: 30_000 });
  expect(sent).toEqual([1]);

  broken = 3;
  await failed.getByRole('button', { name: 'Go on' }).click();
  await expect(failed).toContainText('The connection was lost', { timeout: 30_000 });
  expect(sent).toEqual([1, 2]);

  broken = 0;
  sent = [];
  await page.reload();
  await field.setInputFiles(file);
  await expect(uploaded(page)).toContainText('large.pdf', { timeout: 30_000 });
  expect(sent).toEqual([3]);
});

test('an upload can be cancelled while it is sent', async ({ page }) => {
  const owner = await documentsOfANewShop(page);
  let release = () => {};
  const held = new Promise<void>((resolve) => (release = resolve));
  await page.route(/X-Amz-Signature/, async (route) => {
    await held;
    await route.continue().catch(() => undefined);
  });
  const started = page.waitForResponse((answer) => answer.url().endsWith('/api/v1/uploads'));
  await page.getByLabel('File', { exact: true }).setInputFiles(pdf('slow.pdf', aPdf()));
  const { fileId } = (await (await started).json()) as { fileId: string };
  await expect(page.getByRole('progressbar', { name: 'slow.pdf' })).toBeVisible();
  const gone = page.waitForResponse((answer) => answer.request().method() === 'DELETE');
  await page.getByRole('button', { name: 'Cancel the upload of slow.pdf' }).click();
  expect((await gone).status()).toBe(204);
  release();
  await expect(page.locator('[data-upload]')).toHaveCount(0);
  const state = await page.request.get(`/api/v1/uploads/${fileId}`);
  expect(await state.json()).toMatchObject({ state: 'refused', refusedReason: 'The upload was cancelled.' });
  expect(owner.companyId).toBeTruthy();
});

test('a link is for those who may read: another company and a stranger get nothing', async ({
  page,
  browser,
  trouble,
}) => {
  trouble.allow(/status of 40[134]/);
  await documentsOfANewShop(page);
  await page.getByLabel('File', { exact: true }).setInputFiles(pdf('own.pdf', aPdf()));
  await expect(uploaded(page)).toBeVisible();
  const href = await addDocument(page, 'Own paper');
  const own = await page.request.get(href, { maxRedirects: 0 });
  expect(own.status()).toBe(303);
  expect(own.headers()['cache-control']).toBe('no-store');
  expect(
    Number(new URL(own.headers()['location'] ?? '').searchParams.get('X-Amz-Expires')),
  ).toBeLessThanOrEqual(60);

  const other = await browser.newContext();
  const stranger = await other.newPage();
  expect((await stranger.request.get(href, { maxRedirects: 0 })).status()).toBe(401);
  await signIn(stranger, await anOwner('buyer'));
  expect((await stranger.request.get(href, { maxRedirects: 0 })).status()).toBe(404);
  const state = await stranger.request.get(`/api/v1/uploads/${href.split('/').at(-1)}`);
  expect(state.status()).toBe(404);
  expect(state.headers()['content-type']).toContain('application/problem+json');
  await other.close();
});

test('calls that are broken, foreign or too large are told so as problems', async ({ page, trouble }) => {
  trouble.allow(/status of 4\d\d/);
  const owner = await documentsOfANewShop(page);
  const origin = new URL(page.url()).origin;
  const start = (data: string, headers: Record<string, string> = { origin }) =>
    page.request.post('/api/v1/uploads', {
      data,
      headers: { 'content-type': 'application/json', ...headers },
    });
  expect((await start('{')).status()).toBe(400);
  const fields = await start(JSON.stringify({ companyId: 'x', purpose: 'secret', name: '', size: -1 }));
  expect(fields.status()).toBe(400);
  expect(Object.keys(((await fields.json()) as { fields: object }).fields).sort()).toEqual([
    'companyId',
    'name',
    'purpose',
    'size',
  ]);
  const body = { companyId: owner.companyId, purpose: 'company-document', name: 'a.pdf', size: 10 };
  expect((await start(JSON.stringify(body), { origin: 'https://elsewhere.example' })).status()).toBe(403);
  expect((await start(JSON.stringify({ ...body, size: 2 ** 40 }))).status()).toBe(413);
  expect((await start(JSON.stringify({ ...body, purpose: 'request-sketch' }))).status()).toBe(403);
  expect((await start(JSON.stringify({ ...body, companyId: crypto.randomUUID() }))).status()).toBe(404);
});

test('the field works by keyboard alone', async ({ page }) => {
  await documentsOfANewShop(page);
  const field = page.getByLabel('File', { exact: true });
  await expect(field).toBeEnabled();
  await field.focus();
  const chooser = page.waitForEvent('filechooser');
  await page.keyboard.press('Enter');
  await (await chooser).setFiles(pdf('keys.pdf', aPdf()));
  await expect(uploaded(page)).toBeVisible();
  await page.getByRole('button', { name: 'Remove keys.pdf' }).focus();
  await page.keyboard.press('Enter');
  await expect(uploaded(page)).toHaveCount(0);
});

test.describe('without JavaScript', () => {
  test.use({ javaScriptEnabled: false });
  test('the field says that uploading needs it', async ({ page, trouble }) => {
    // The browser does not fetch what it may not run.
    trouble.allow(/^request failed: GET \S+\.js csp$/);
    await documentsOfANewShop(page);
    await expect(page.locator('noscript p', { hasText: 'Uploading files needs JavaScript' })).toBeVisible();
    await expect(page.getByLabel('File', { exact: true })).toBeDisabled();
  });
});
