import { randomBytes } from 'node:crypto';
import type { Browser, Page } from '@playwright/test';
import { expectAccessible } from '../support/axe.ts';
import { expect, test, waitForMail, watch, type TroubleLog } from '../support/e2e.ts';

const mark = randomBytes(4).toString('hex');
const owner = { name: 'Weir owner', email: `owner-${mark}@weir.example`, password: 'quench ring otter' };
const engineer = {
  name: 'Weir engineer',
  email: `engineer-${mark}@weir.example`,
  password: 'copper basin late',
};
const companyName = `Weir Hardening ${mark}`;

/** The path of a link in a mail: the mail may name the origin, the browser has it already. */
async function linkFor(to: string, subject: string | RegExp): Promise<string> {
  const mail = await waitForMail({ to, subject });
  const link = new URL(mail.links[0] ?? '');
  expect(mail.html).toContain(link.pathname);
  return link.pathname + link.search;
}

async function signUp(page: Page, who: typeof owner): Promise<void> {
  await page.getByLabel('Your name').fill(who.name);
  await page.getByLabel('E-mail address').fill(who.email);
  await page.getByLabel('Password').fill(who.password);
  await page.getByRole('button', { name: 'Sign up' }).click();
  await expect(page.getByRole('heading', { name: 'Look into your mail' })).toBeVisible();
}

async function verify(page: Page, who: typeof owner): Promise<void> {
  await page.goto(await linkFor(who.email, 'Confirm your e-mail address'));
  await page.getByRole('button', { name: 'Confirm this address' }).click();
  await expect(page.getByText('Your e-mail address is confirmed.')).toBeVisible();
}

async function signInHere(page: Page, who: typeof owner): Promise<void> {
  await page.getByLabel('E-mail address').fill(who.email);
  await page.getByLabel('Password').fill(who.password);
  await page.locator('main').getByRole('button', { name: 'Sign in' }).click();
}

async function signOut(page: Page, who: typeof owner): Promise<void> {
  await page.locator('header details').filter({ hasText: who.name }).locator('summary').first().click();
  await page.getByRole('button', { name: 'Sign out' }).click();
  await expect(page.getByText('You are signed out.')).toBeVisible();
}

/** A second person at a browser of their own, watched like the first. */
async function anotherBrowser(browser: Browser, trouble: TroubleLog): Promise<Page> {
  const context = await browser.newContext({ locale: 'en-GB' });
  await watch(context, trouble);
  return context.newPage();
}

test.describe.configure({ mode: 'serial' });

test('sign up, confirm by mail, enter a company, invite; the colleague accepts, both sign out', async ({
  page,
  browser,
  trouble,
}) => {
  test.setTimeout(180_000);
  await page.goto('/sign-up');
  await expectAccessible(page);
  await signUp(page, owner);
  await expectAccessible(page);
  await page.goto(await linkFor(owner.email, 'Confirm your e-mail address'));
  await expectAccessible(page);
  await page.getByRole('button', { name: 'Confirm this address' }).click();
  await expectAccessible(page);
  await signInHere(page, owner);
  await expect(page.getByText('No company yet')).toBeVisible();
  await expectAccessible(page);

  await page.getByRole('link', { name: 'Enter your company' }).click();
  await expectAccessible(page);
  await page.getByRole('button', { name: 'Enter the company' }).click();
  await expect(page.getByRole('alert')).toContainText('Choose what the company does here.');
  await expect(page).toHaveTitle(/^Error: /);
  await page.getByRole('radio', { name: 'Buyer' }).check();
  await page.getByLabel('Name of the company').fill(companyName);
  await page.getByRole('button', { name: 'Enter the company' }).click();
  await expect(page.getByRole('heading', { level: 1, name: companyName })).toBeVisible();
  await expectAccessible(page);

  await page.getByLabel('E-mail address of a colleague').fill(engineer.email);
  await page.getByRole('button', { name: 'Invite' }).click();
  await expect(page.getByRole('alert')).toContainText('Choose at least one role.');
  await expect(page.getByLabel('E-mail address of a colleague')).toHaveValue(engineer.email);
  await page
    .locator('form[action="?/invite"]')
    .getByRole('checkbox', { name: /^Engineer/ })
    .check();
  await page.getByRole('button', { name: 'Invite' }).click();
  await expect(page.getByText(`An invitation is on its way to ${engineer.email}.`)).toBeVisible();

  const colleague = await anotherBrowser(browser, trouble);
  await colleague.goto(await linkFor(engineer.email, /invites you/));
  await expect(colleague.getByRole('heading', { name: `Work with ${companyName}` })).toBeVisible();
  await expectAccessible(colleague);
  await colleague.getByRole('link', { name: 'Sign up' }).click();
  await expect(colleague.getByLabel('E-mail address')).toHaveValue(engineer.email);
  await signUp(colleague, engineer);
  await verify(colleague, engineer);
  await signInHere(colleague, engineer);
  await colleague.getByRole('link', { name: `Answer the invitation of ${companyName}` }).click();
  await colleague.getByRole('button', { name: 'Accept' }).click();
  await expect(colleague.getByRole('heading', { level: 1, name: companyName })).toBeVisible();
  await expect(colleague.getByText('Engineer', { exact: false }).first()).toBeVisible();
  await expect(colleague.getByRole('button', { name: 'Invite' })).toHaveCount(0);
  await waitForMail({ to: owner.email, subject: `${engineer.name} has joined your company` });

  await page.goto('/desk');
  await expect(page.getByRole('link', { name: `${engineer.name} has joined your company` })).toBeVisible();
  await expectAccessible(page);
  await signOut(page, owner);
  await signOut(colleague, engineer);
  await page.goto('/desk');
  await expect(page).toHaveURL(/\/sign-in\?next=%2Fdesk/);
  await colleague.context().close();
});

test('the account: units and zone, sessions, two-factor set-up, a new password', async ({
  page,
  browser,
  trouble,
}) => {
  test.setTimeout(120_000);
  await page.goto('/sign-in?next=%2Faccount');
  await expectAccessible(page);
  await signInHere(page, owner);
  await expect(page).toHaveURL(/\/account$/);
  await expectAccessible(page);
  await page.getByRole('radio', { name: 'Inch' }).check();
  await page.getByLabel('Time zone').selectOption('America/Chicago');
  await page.getByRole('button', { name: 'Save' }).click();
  await expect(page.getByText('Your account was saved.')).toBeVisible();
  await page.reload();
  await expect(page.getByRole('radio', { name: 'Inch' })).toBeChecked();

  const elsewhere = await anotherBrowser(browser, trouble);
  await elsewhere.goto('/sign-in');
  await signInHere(elsewhere, owner);
  await expect(elsewhere).toHaveURL(/\/desk/);
  await page.goto('/account/security');
  await expectAccessible(page);
  await page.getByRole('button', { name: 'End all other sessions' }).click();
  await expect(
    page.getByText('session has ended', { exact: false }).or(page.getByText('sessions have ended')),
  ).toBeVisible();
  await elsewhere.goto('/desk');
  await expect(elsewhere).toHaveURL(/\/sign-in/);
  await elsewhere.context().close();

  await page.goto('/account/two-factor');
  await expectAccessible(page);
  await page.getByLabel('Present password').fill(owner.password);
  await page.getByRole('button', { name: 'Go on' }).click();
  await expect(page.getByRole('img', { name: /QR code/ })).toBeVisible();
  await expectAccessible(page);
  const key = await page.getByLabel('Key, to enter by hand').inputValue();
  expect(key).toMatch(/^[A-Z2-7 ]{50,}$/);
  await page.getByLabel('Code', { exact: true }).fill('000000');
  await page.getByRole('button', { name: 'Turn it on' }).click();
  await expect(page.getByRole('alert')).toContainText('This code is not right.');
  // Nothing is lost by a wrong code: the same key is still shown.
  await expect(page.getByLabel('Key, to enter by hand')).toHaveValue(key);
});

test('a forgotten password is replaced by mail, without script as well', async ({ browser, trouble }) => {
  test.setTimeout(120_000);
  const context = await browser.newContext({ javaScriptEnabled: false, locale: 'en-GB' });
  context.on('response', (response) => {
    if (response.status() >= 500) trouble.note(`status ${response.status()}: ${response.url()}`);
  });
  const page = await context.newPage();
  await page.goto('/forgot');
  await page.getByRole('button', { name: 'Send me the link' }).click();
  await expect(page.getByRole('alert')).toContainText('Enter an e-mail address');
  await page.getByLabel('E-mail address').fill(engineer.email);
  await page.getByRole('button', { name: 'Send me the link' }).click();
  await expect(page.getByRole('heading', { name: 'Look into your mail' })).toBeVisible();
  const link = await linkFor(engineer.email, 'Choose a new password');
  await page.goto(link);
  await page.getByLabel('New password').fill('password1234');
  await page.getByRole('button', { name: 'Set the password' }).click();
  await expect(page.getByRole('alert')).toContainText('among those that are tried first');
  const next = { ...engineer, password: 'another spiral kettle' };
  await page.getByLabel('New password').fill(next.password);
  await page.getByRole('button', { name: 'Set the password' }).click();
  await expect(page.getByText('Your new password is set.')).toBeVisible();
  await signInHere(page, engineer);
  await expect(page.getByRole('alert')).toContainText('do not fit together');
  await signInHere(page, next);
  await expect(page).toHaveURL(/\/desk/);
  await page.goto(link);
  await page.goto('/sign-out');
  await page.locator('main').getByRole('button', { name: 'Sign out' }).click();
  await page.goto(link);
  await page.getByLabel('New password').fill('yet another kettle');
  await page.getByRole('button', { name: 'Set the password' }).click();
  await expect(page.getByRole('heading', { name: 'This link does not work any more' })).toBeVisible();
  await context.close();
});

test('pages carry the security headers, and a page that is not there says which request it was', async ({
  page,
  trouble,
}) => {
  trouble.allow(/status of 404/);
  const answer = await page.goto('/no-such-page');
  const headers = answer?.headers() ?? {};
  expect(answer?.status()).toBe(404);
  expect(headers['x-content-type-options']).toBe('nosniff');
  expect(headers['referrer-policy']).toBe('strict-origin-when-cross-origin');
  expect(headers['content-security-policy']).toContain("object-src 'none'");
  expect(headers['content-security-policy']).not.toContain('unsafe-eval');
  expect(headers['content-security-policy']).toMatch(/form-action 'self' http/);
  await expect(page.getByText(headers['x-request-id'] ?? 'none')).toBeVisible();
  await expectAccessible(page);
  const signIn = await page.goto('/sign-in');
  expect(signIn?.headers()['content-security-policy']).toMatch(/script-src 'self' 'nonce-/);
});
