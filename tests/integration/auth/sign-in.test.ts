import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { AppError } from '../../../src/lib/domain/errors.ts';
import {
  askPasswordReset,
  resetPassword,
  resolveVisitor,
  sendVerificationAgain,
  signIn,
  signOut,
  signUp,
  verifyAddress,
} from '../../../src/lib/server/auth/index.ts';
import { session, user, verification } from '../../../src/lib/server/db/schema/auth.ts';
import { outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { aBrowser } from '../../support/auth.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { pathIn } from '../../support/mail.ts';
import { refusal } from '../../support/refusal.ts';

let t: TestDatabase;
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

const person = {
  name: 'Millrace engineer',
  email: 'engineer@millrace.example',
  password: 'quench ring otter',
};
const credentials = { email: person.email, password: person.password, remember: true };

async function signedUp() {
  const browser = aBrowser(t.db);
  await signUp(browser, person);
  const [mail] = await browser.mails();
  await verifyAddress(browser, pathIn(mail).searchParams.get('token') ?? '');
  return browser;
}

test('a person signs up, confirms the address by the mail, signs in and signs out', async () => {
  const browser = aBrowser(t.db);
  await signUp(browser, person);
  expect(browser.cookies.size).toBe(0);
  const [mail, ...others] = await browser.mails();
  expect(others).toEqual([]);
  expect(mail).toMatchObject({ to: person.email, subject: 'Confirm your e-mail address' });

  expect((await refusal(signIn(browser, credentials))).code).toBe('email-not-verified');
  expect(browser.cookies.size).toBe(0);

  const link = pathIn(mail);
  expect(link.pathname).toBe('/verify');
  expect(await verifyAddress(browser, link.searchParams.get('token') ?? '')).toBe('verified');
  expect(await signIn(browser, credentials)).toBe('signed-in');
  const visitor = await resolveVisitor(t.db, browser.auth, browser.headers, 'r1');
  expect(visitor?.actor).toMatchObject({
    email: person.email,
    emailVerified: true,
    memberships: [],
    requestId: 'r1',
  });
  expect((await t.db.select().from(session))[0]?.ipAddress).toBe('192.0.2.7');

  const before = browser.headers;
  await signOut(browser);
  expect(await resolveVisitor(t.db, browser.auth, browser.headers, 'r2')).toBeUndefined();
  // The old cookie is worth nothing either.
  expect(await resolveVisitor(t.db, browser.auth, before, 'r3')).toBeUndefined();
});

test('the session cookie is bound to this host, to https, and not readable by scripts', async () => {
  const browser = await signedUp();
  await signIn(browser, credentials);
  const own = browser.setCookies.find((cookie) => cookie.name === '__Host-coilyard');
  expect(own?.options).toMatchObject({ secure: true, httpOnly: true, sameSite: 'lax', path: '/' });
  expect(own?.options['domain']).toBeUndefined();
  for (const other of browser.setCookies) expect(other.name).toMatch(/^__Host-coilyard/);
});

test('signing in gives a new session each time, and ids are UUIDs of version 7', async () => {
  const browser = await signedUp();
  await signIn(browser, credentials);
  const first = browser.cookies.get('__Host-coilyard');
  await signIn(browser, credentials);
  expect(browser.cookies.get('__Host-coilyard')).not.toBe(first);
  for (const row of await t.db.select().from(session)) {
    expect(row.id).toMatch(/^[0-9a-f]{8}-[0-9a-f]{4}-7[0-9a-f]{3}-[89ab][0-9a-f]{3}-[0-9a-f]{12}$/);
  }
});

test('signing up with a known address answers the same, takes as long, and tells its owner by mail only', async () => {
  const browser = await signedUp();
  const rows = await t.db.select().from(user);
  const time = async (email: string) => {
    const start = performance.now();
    await signUp(browser, { ...person, email });
    return performance.now() - start;
  };
  const known = await time(person.email);
  const unknown = await time('nobody-yet@millrace.example');
  expect(Math.abs(known - unknown)).toBeLessThan(150);
  const mails = await browser.mails();
  expect(mails.map((m) => [m.to, m.subject])).toEqual([
    [person.email, 'You have an account already'],
    ['nobody-yet@millrace.example', 'Confirm your e-mail address'],
  ]);
  const [still] = await t.db.select().from(user).where(eq(user.email, person.email));
  expect(still).toEqual(rows[0]);
  expect(await signIn(browser, credentials)).toBe('signed-in');
});

test('a wrong password and an unknown address are refused with the same words, in the same time', async () => {
  const browser = await signedUp();
  const timed = async (email: string) => {
    const times: number[] = [];
    let problem: AppError | undefined;
    for (let i = 0; i < 5; i += 1) {
      const start = performance.now();
      problem = await refusal(signIn(browser, { email, password: 'not this one at all', remember: false }));
      times.push(performance.now() - start);
    }
    return { code: problem?.code, fields: problem?.fields, ms: times.sort((a, b) => a - b)[2] ?? 0 };
  };
  const known = await timed(person.email);
  const unknown = await timed('nobody@millrace.example');
  expect(unknown).toMatchObject({ code: known.code, fields: known.fields });
  // Without the hash that is made for unknown addresses too, theirs would take a tenth of the time.
  expect(Math.min(known.ms, unknown.ms) / Math.max(known.ms, unknown.ms)).toBeGreaterThan(0.5);
  expect(browser.cookies.size).toBe(0);
});

test('a new password is chosen by the token of the mail, once, and every session ends', async () => {
  const browser = await signedUp();
  await signIn(browser, credentials);
  const other = aBrowser(t.db, '192.0.2.8');
  await askPasswordReset(other, { email: person.email });
  await askPasswordReset(other, { email: 'nobody@millrace.example' });
  const mails = await other.mails();
  expect(mails.map((m) => m.to)).toEqual([person.email]);
  const token = pathIn(mails[0]).searchParams.get('token') ?? '';
  // What the database holds does not open the door.
  const held = await t.db.select().from(verification);
  expect(JSON.stringify(held)).not.toContain(token);

  const weak = await refusal(resetPassword(other, { token, password: 'password1234' }));
  expect(weak.fields['password']).toMatch(/tried first/);
  await resetPassword(other, { token, password: 'new kettle brazed' });
  expect(await resolveVisitor(t.db, browser.auth, browser.headers, 'r')).toBeUndefined();
  expect((await refusal(signIn(browser, credentials))).code).toBe('wrong-sign-in');
  expect(await signIn(browser, { ...credentials, password: 'new kettle brazed' })).toBe('signed-in');
  expect((await refusal(resetPassword(other, { token, password: 'once more with it' }))).code).toBe(
    'link-not-valid',
  );
  expect((await other.mails()).map((m) => m.subject)).toEqual(['Your password was changed']);
});

test('mails that carry a token are unreadable in the outbox and erased after sending', async () => {
  const browser = aBrowser(t.db);
  await signUp(browser, person);
  const [queued] = await t.db.select().from(outboxMail);
  expect(queued?.secret).toBe(true);
  expect(queued?.body).not.toContain('verify');
  await browser.mails();
  const [sent] = await t.db.select().from(outboxMail);
  expect(sent).toMatchObject({ state: 'sent', body: '' });
});

test('made-up, foreign and outdated links are refused', async () => {
  const browser = aBrowser(t.db);
  for (const token of ['', 'x', 'a.b.c', 'eyJhbGciOiJub25lIn0.eyJlbWFpbCI6ImFAYi5jIn0.']) {
    expect((await refusal(verifyAddress(browser, token))).code).toBe('link-not-valid');
    expect(
      (await refusal(resetPassword(browser, { token: token || 'none', password: 'quench ring otter' }))).code,
    ).toBe('link-not-valid');
  }
});

test('the mail can be asked for again, and only who waits for it gets one', async () => {
  const browser = aBrowser(t.db);
  await signUp(browser, person);
  await browser.mails();
  await sendVerificationAgain(browser, { email: person.email });
  await sendVerificationAgain(browser, { email: 'nobody@millrace.example' });
  expect((await browser.mails()).map((m) => m.to)).toEqual([person.email]);
});

test('tries are limited per account and per address, known or not', async () => {
  const browser = await signedUp();
  const limit = 200; // test and demo; ten in production
  const wrong = { ...credentials, password: 'not this one at all' };
  await refusal(signIn(browser, wrong));
  await t.db.$client.execute({
    sql: `update rate_limit set count = ? where key like 'sign-in/account/%'`,
    args: [limit],
  });
  const refused = await refusal(signIn(browser, wrong));
  expect(refused.code).toBe('too-many-requests');
  // The right password does not help while the account is closed; another account is free.
  expect((await refusal(signIn(browser, credentials))).code).toBe('too-many-requests');
  expect((await refusal(signIn(browser, { ...wrong, email: 'other@millrace.example' }))).code).toBe(
    'wrong-sign-in',
  );
  await t.db.$client.execute({
    sql: `update rate_limit set count = ? where key like 'sign-in/address/%'`,
    args: [limit * 5],
  });
  expect((await refusal(signIn(browser, { ...wrong, email: 'third@millrace.example' }))).code).toBe(
    'too-many-requests',
  );
});

test('a session ends after two weeks however much it is used', async () => {
  const browser = await signedUp();
  await signIn(browser, credentials);
  const at = (days: number) => new Date(Date.now() - days * 86_400_000);
  await t.db.update(session).set({ createdAt: at(13.9) });
  expect(await resolveVisitor(t.db, browser.auth, browser.headers, 'r')).toBeDefined();
  await t.db.update(session).set({ createdAt: at(14.1) });
  expect(await resolveVisitor(t.db, browser.auth, browser.headers, 'r')).toBeUndefined();
  expect(await t.db.select().from(session)).toEqual([]);
});

test('a session that was idle for a day is over', async () => {
  const browser = await signedUp();
  await signIn(browser, credentials);
  const [row] = await t.db.select().from(session);
  expect((row?.expiresAt.getTime() ?? 0) - Date.now()).toBeLessThanOrEqual(86_400_000);
  await t.db.update(session).set({ expiresAt: new Date(Date.now() - 1000) });
  expect(await resolveVisitor(t.db, browser.auth, browser.headers, 'r')).toBeUndefined();
});
