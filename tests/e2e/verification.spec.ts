import type { Page } from '@playwright/test';
import { expectAccessible } from '../support/axe.ts';
import { anOwner, aSignUp } from '../support/e2e-people.ts';
import { expect, signIn, test, waitForMail } from '../support/e2e.ts';
import { aPdf } from '../support/files.ts';

async function aDocument(page: Page, companyId: string, title: string): Promise<void> {
  await page.goto(`/companies/${companyId}/documents`);
  await page
    .getByLabel('File', { exact: true })
    .setInputFiles({ name: 'register.pdf', mimeType: 'application/pdf', buffer: Buffer.from(aPdf()) });
  await expect(page.locator('[data-upload="done"]')).toBeVisible();
  await page.getByLabel('What it is').fill(title);
  await page.getByLabel('Kind').selectOption('registration');
  await page.getByRole('button', { name: 'Add the document' }).click();
  await expect(page.getByRole('link', { name: title })).toBeVisible();
}

async function fillProfile(page: Page): Promise<void> {
  await page
    .getByLabel('Your shop in a few sentences')
    .fill('Bent and brazed inductors, one to fifty pieces.');
  await page.getByLabel('Cylindrical helix').check();
  await page.getByLabel('Pancake').check();
  await page.getByLabel('Largest tube, outside').fill('3/4 in');
  await page.getByLabel('Street and number').fill('4 Fennel Row');
  await page.getByLabel('Postal code').fill('00000');
  await page.getByLabel('Town').fill('Anyford');
  await page.getByLabel('Country').selectOption('GB');
}

test('a fabricator asks, an admin refuses with reasons, it asks again, is verified and stands in the directory', async ({
  page,
  browser,
}) => {
  test.setTimeout(120_000);
  const shop = await anOwner('fabricator');
  await signIn(page, shop);
  await aDocument(page, shop.companyId, 'Register extract');
  await page.goto(`/companies/${shop.companyId}/verification`);
  await expect(page.getByText('Not verified').first()).toBeVisible();
  await expectAccessible(page);

  // What is missing is told at the fields, and nothing that was ticked or typed is lost.
  await fillProfile(page);
  await page.getByLabel('Town').fill('');
  await page.getByRole('button', { name: 'Ask to be verified' }).click();
  await expect(page.getByRole('alert')).toContainText('Enter the town.');
  await expect(page.getByRole('alert')).toContainText('Name at least one document');
  await expect(page.getByLabel('Pancake')).toBeChecked();
  await expect(page.getByLabel('Largest tube, outside')).toHaveValue('3/4 in');
  await expectAccessible(page);
  await page.getByLabel('Town').fill('Anyford');
  await page.getByLabel('Register extract').check();
  await page.getByRole('button', { name: 'Ask to be verified' }).click();
  await expect(page.getByText('Asked. You get a mail when it is decided.')).toBeVisible();
  await expect(page.getByText('Waits for an answer').first()).toBeVisible();
  await expectAccessible(page);

  const adminContext = await browser.newContext();
  const adminPage = await adminContext.newPage();
  const admin = await aSignUp('Verifying admin', { admin: true });
  await signIn(adminPage, admin);
  await adminPage.goto('/admin/verification');
  await expectAccessible(adminPage);
  await adminPage.getByRole('link', { name: shop.companyName }).click();
  await expect(adminPage.getByText('4 Fennel Row')).toBeVisible();
  await expect(adminPage.getByText('up to 19.05 mm')).toBeVisible();
  const [download] = await Promise.all([
    adminPage.waitForEvent('download'),
    adminPage.getByRole('link', { name: 'Register extract' }).click(),
  ]);
  expect(download.suggestedFilename()).toBe('register.pdf');
  await expectAccessible(adminPage);

  await adminPage.getByRole('button', { name: 'Refuse' }).click();
  await expect(adminPage.getByRole('alert')).toContainText('Give the reasons');
  await adminPage.getByLabel('Reasons').fill('The second page of the extract is missing.');
  await adminPage.getByRole('button', { name: 'Refuse' }).click();
  await expect(adminPage.getByText('Refused; the company has been told the reasons.')).toBeVisible();
  const refusal = await waitForMail({ to: shop.email, subject: 'not verified' });
  expect(refusal.text).toContain('The second page of the extract is missing.');

  await page.reload();
  await expect(page.getByText('The second page of the extract is missing.')).toBeVisible();
  await expect(page.getByLabel('Town')).toHaveValue('Anyford');
  await page.getByLabel('Register extract').check();
  await page.getByRole('button', { name: 'Ask to be verified' }).click();
  await expect(page.getByText('Waits for an answer').first()).toBeVisible();

  await adminPage.goto('/admin/verification');
  await adminPage.getByRole('link', { name: shop.companyName }).click();
  await adminPage.getByRole('button', { name: `Verify ${shop.companyName}` }).click();
  await expect(adminPage.getByRole('alert')).toContainText('Tick what exactly was verified');
  await adminPage.getByLabel('The company exists in its public register').check();
  await adminPage.getByRole('button', { name: `Verify ${shop.companyName}` }).click();
  await expect(adminPage.getByText('Verified; the company has been told.')).toBeVisible();
  const mail = await waitForMail({ to: shop.email, subject: 'Your company is verified' });
  expect(mail.text).toContain('The company exists in its public register');
  expect(mail.text).toContain(`/companies/${shop.companyId}/verification`);

  await page.goto('/notifications');
  await expect(page.getByRole('button', { name: 'Your company is verified', exact: true })).toBeVisible();
  await expectAccessible(page);
  await page.getByRole('button', { name: 'Your company is verified', exact: true }).click();
  await expect(page).toHaveURL(new RegExp(`/companies/${shop.companyId}/verification$`));
  await expect(page.getByText(/Verified until/).first()).toBeVisible();

  const buyerContext = await browser.newContext();
  const buyerPage = await buyerContext.newPage();
  await signIn(buyerPage, await anOwner('buyer'));
  await buyerPage.goto(`/fabricators?q=${encodeURIComponent(shop.companyName)}&shape=pancake`);
  await expectAccessible(buyerPage);
  await buyerPage.getByRole('link', { name: shop.companyName }).click();
  await expect(buyerPage.getByText('The company exists in its public register')).toBeVisible();
  await expect(buyerPage.getByText('Anyford, GB')).toBeVisible();
  await expect(buyerPage.getByText('4 Fennel Row')).toHaveCount(0);
  await expectAccessible(buyerPage);
  await Promise.all([adminContext.close(), buyerContext.close()]);
});

test('the pages of the admin work, and are not there for anybody else', async ({
  page,
  browser,
  trouble,
}) => {
  trouble.allow(/status of 404/);
  test.setTimeout(120_000);
  await signIn(page, await aSignUp('Watching admin', { admin: true }));
  for (const path of ['', '/verification', '/outbox', '/jobs', '/users', '/audit']) {
    await page.goto(`/admin${path}`);
    await expect(page.getByRole('navigation', { name: 'Admin' })).toBeVisible();
    await expectAccessible(page);
  }
  await page.getByRole('button', { name: 'Check every seal' }).click();
  await expect(page.getByText('Every seal fits its rows.')).toBeVisible();
  await page.goto('/admin');
  await expect(page.getByText('The object store answers.')).toBeVisible({ timeout: 40_000 });
  await expect(page.getByText('The payment service answers.')).toBeVisible();
  await expect(page.getByText('The mail server takes mail.')).toBeVisible();

  const context = await browser.newContext();
  const outsider = await context.newPage();
  await signIn(outsider, await anOwner('buyer'));
  for (const path of ['', '/verification', '/outbox', '/jobs', '/users', '/audit']) {
    const answer = await outsider.goto(`/admin${path}`);
    expect(answer?.status(), path).toBe(404);
  }
  await context.close();
});
