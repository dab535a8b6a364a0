import { createOTP } from '@better-auth/utils/otp';
import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import {
  answerSecondFactor,
  askAddressChange,
  changePassword,
  confirmPassword,
  confirmTwoFactor,
  createVerifiedPerson,
  endOtherSessions,
  endSession,
  listSessions,
  pendingTwoFactor,
  requireFreshSession,
  resolveVisitor,
  signIn,
  startTwoFactor,
  stopTwoFactor,
  updateProfile,
  verifyAddress,
} from '../../../src/lib/server/auth/index.ts';
import { session, twoFactor, user } from '../../../src/lib/server/db/schema/auth.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import { aBrowser, type Browser } from '../../support/auth.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { pathIn } from '../../support/mail.ts';
import { refusal } from '../../support/refusal.ts';

let t: TestDatabase;
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

const password = 'quench ring otter';

async function signedIn(email: string, address?: string) {
  const browser = aBrowser(t.db, address);
  await createVerifiedPerson(t.db, browser.auth, { name: 'Kestrelmoor purchaser', email, password });
  expect(await signIn(browser, { email, password, remember: true })).toBe('signed-in');
  return { browser, ...(await visitor(browser)) };
}

async function visitor(browser: Browser): Promise<{ actor: Actor; sessionId: string; freshUntil: number }> {
  const found = await resolveVisitor(t.db, browser.auth, browser.headers, 'r');
  if (!found) throw new Error('nobody is signed in');
  return { actor: found.actor, sessionId: found.session.id, freshUntil: found.session.freshUntil };
}

test('name, zone and units are the person’s own to change, and the actor carries them', async () => {
  const { browser, actor } = await signedIn('a@kestrelmoor.example');
  await updateProfile(t.db, actor, { name: 'Purchasing', timeZone: 'America/Chicago', unitSet: 'inch' });
  expect((await visitor(browser)).actor).toMatchObject({
    name: 'Purchasing',
    timeZone: 'America/Chicago',
    unitSet: 'inch',
  });
});

test('own sessions are listed without tokens and ended; somebody else’s is not found and stays', async () => {
  const one = await signedIn('a@kestrelmoor.example', '192.0.2.1');
  const two = await signedIn('a@kestrelmoor.example', '192.0.2.2');
  const stranger = await signedIn('b@kestrelmoor.example');
  const list = await listSessions(t.db, one.actor, one.sessionId);
  expect(list.map((s) => [s.ipAddress, s.current])).toEqual([
    ['192.0.2.2', false],
    ['192.0.2.1', true],
  ]);
  expect(Object.keys(list[0] ?? {})).not.toContain('token');

  expect((await refusal(endSession(t.db, stranger.actor, one.sessionId))).code).toBe('not-found');
  expect(await listSessions(t.db, one.actor, null)).toHaveLength(2);
  await endSession(t.db, one.actor, two.sessionId);
  expect(await resolveVisitor(t.db, two.browser.auth, two.browser.headers, 'r')).toBeUndefined();
  await signedIn('a@kestrelmoor.example');
  expect(await endOtherSessions(t.db, one.actor, one.sessionId)).toBe(1);
  expect(await listSessions(t.db, stranger.actor, null)).toHaveLength(1);
});

test('a new password needs the present one, ends the other sessions, and is told by mail', async () => {
  const one = await signedIn('a@kestrelmoor.example');
  const two = await signedIn('a@kestrelmoor.example');
  const wrong = await refusal(
    changePassword(one.browser, one.actor, {
      currentPassword: 'not this one at all',
      newPassword: 'copper basin late',
    }),
  );
  expect(wrong.fields).toHaveProperty('currentPassword');
  await changePassword(one.browser, one.actor, {
    currentPassword: password,
    newPassword: 'copper basin late',
  });
  expect((await visitor(one.browser)).actor.userId).toBe(one.actor.userId);
  expect(await resolveVisitor(t.db, two.browser.auth, two.browser.headers, 'r')).toBeUndefined();
  expect((await one.browser.mails()).map((m) => m.subject)).toEqual(['Your password was changed']);
});

test('a new address counts once it is confirmed there; the old one is told; a taken one tells nothing', async () => {
  const { browser, actor } = await signedIn('old@kestrelmoor.example');
  await signedIn('taken@kestrelmoor.example');
  await askAddressChange(browser, actor, { email: 'taken@kestrelmoor.example', currentPassword: password });
  expect((await browser.mails()).map((m) => m.to)).toEqual(['old@kestrelmoor.example']);

  await askAddressChange(browser, actor, { email: 'new@kestrelmoor.example', currentPassword: password });
  const mails = await browser.mails();
  expect(mails.map((m) => m.to).sort()).toEqual(['new@kestrelmoor.example', 'old@kestrelmoor.example']);
  expect((await visitor(browser)).actor.email).toBe('old@kestrelmoor.example');
  const token = pathIn(mails.find((m) => m.to.startsWith('new'))).searchParams.get('token') ?? '';
  expect(await verifyAddress(browser, token)).toBe('changed');
  expect((await visitor(browser)).actor).toMatchObject({
    email: 'new@kestrelmoor.example',
    emailVerified: true,
  });
  expect((await refusal(verifyAddress(browser, token))).code).toBe('link-not-valid');
});

test('an address that was taken before the link was used is refused, and the account keeps its own', async () => {
  const { browser, actor } = await signedIn('old@kestrelmoor.example');
  await askAddressChange(browser, actor, { email: 'new@kestrelmoor.example', currentPassword: password });
  const mail = (await browser.mails()).find((m) => m.to.startsWith('new'));
  await signedIn('new@kestrelmoor.example');
  expect((await refusal(verifyAddress(browser, pathIn(mail).searchParams.get('token') ?? ''))).code).toBe(
    'link-not-valid',
  );
  expect((await t.db.select().from(user).where(eq(user.id, actor.userId)))[0]?.email).toBe(
    'old@kestrelmoor.example',
  );
});

test('freshness lapses after half an hour without use, moves on with use, and comes back with the password', async () => {
  const { browser, actor, sessionId, freshUntil } = await signedIn('a@kestrelmoor.example');
  expect(freshUntil - Date.now()).toBeGreaterThan(29 * 60_000);
  expect(() => requireFreshSession({ id: sessionId, freshUntil })).not.toThrow();
  await t.db.update(session).set({ freshUntil: new Date(Date.now() + 60_000) });
  expect((await visitor(browser)).freshUntil - Date.now()).toBeGreaterThan(29 * 60_000);

  await t.db.update(session).set({ freshUntil: new Date(Date.now() - 1000) });
  const stale = (await visitor(browser)).freshUntil;
  expect(() => requireFreshSession({ id: sessionId, freshUntil: stale })).toThrow(/sign in again/);
  await refusal(confirmPassword(browser, actor, sessionId, 'not this one at all'));
  expect((await visitor(browser)).freshUntil).toBe(stale);
  await confirmPassword(browser, actor, sessionId, password);
  expect((await visitor(browser)).freshUntil).toBeGreaterThan(Date.now());
});

async function codeFor(uri: string): Promise<string> {
  // RFC 6238 with the values of the otpauth address, as an authenticator reads them.
  const secret = new URL(uri).searchParams.get('secret') ?? '';
  const alphabet = 'ABCDEFGHIJKLMNOPQRSTUVWXYZ234567';
  const bits = [...secret].map((c) => alphabet.indexOf(c).toString(2).padStart(5, '0')).join('');
  const bytes = Buffer.from((bits.match(/.{8}/g) ?? []).map((b) => parseInt(b, 2)));
  return createOTP(bytes.toString('utf8'), { digits: 6 }).totp();
}

test('a second factor is set up with a code, asked for at sign-in, and turned off with the password', async () => {
  const email = 'a@kestrelmoor.example';
  const { browser, actor } = await signedIn(email);
  await refusal(startTwoFactor(browser, actor, 'not this one at all'));
  expect(await pendingTwoFactor(browser, actor)).toBeNull();
  await startTwoFactor(browser, actor, password);
  const pending = await pendingTwoFactor(browser, actor);
  if (!pending) throw new Error('nothing pending');
  expect(pending.uri).toMatch(/^otpauth:\/\/totp\/Coilyard/);
  expect(pending.backupCodes.length).toBeGreaterThanOrEqual(10);
  const [row] = await t.db.select().from(twoFactor);
  expect(`${row?.secret}${row?.backupCodes}`).not.toContain(pending.backupCodes[0]);

  expect((await refusal(confirmTwoFactor(browser, actor, '000000'))).fields).toHaveProperty('code');
  expect((await visitor(browser)).actor.twoFactor).toBe(false);
  await confirmTwoFactor(browser, actor, await codeFor(pending.uri));
  expect((await visitor(browser)).actor.twoFactor).toBe(true);
  expect(await pendingTwoFactor(browser, actor)).toBeNull();

  const elsewhere = aBrowser(t.db, '192.0.2.9');
  expect(await signIn(elsewhere, { email, password, remember: true })).toBe('second-factor');
  expect(await resolveVisitor(t.db, elsewhere.auth, elsewhere.headers, 'r')).toBeUndefined();
  const wrong = await refusal(
    answerSecondFactor(elsewhere, { code: '000000', backup: false, trustDevice: false }),
  );
  expect(wrong.fields).toHaveProperty('code');
  await answerSecondFactor(elsewhere, {
    code: await codeFor(pending.uri),
    backup: false,
    trustDevice: false,
  });
  expect((await visitor(elsewhere)).actor.userId).toBe(actor.userId);

  const third = aBrowser(t.db, '192.0.2.10');
  await signIn(third, { email, password, remember: true });
  await answerSecondFactor(third, { code: pending.backupCodes[0] ?? '', backup: true, trustDevice: false });
  const fourth = aBrowser(t.db, '192.0.2.11');
  await signIn(fourth, { email, password, remember: true });
  await refusal(
    answerSecondFactor(fourth, { code: pending.backupCodes[0] ?? '', backup: true, trustDevice: false }),
  );

  await stopTwoFactor(browser, actor, password);
  expect(await signIn(fourth, { email, password, remember: true })).toBe('signed-in');
  expect((await t.db.select().from(auditEvent)).map((e) => e.action)).toEqual(
    expect.arrayContaining(['user.two-factor-on', 'user.two-factor-off', 'user.sign-in-second-factor']),
  );
});

test('a second step without the first is sent back to the sign-in', async () => {
  const browser = aBrowser(t.db);
  const problem = await refusal(
    answerSecondFactor(browser, { code: '123456', backup: false, trustDevice: false }),
  );
  expect(problem.code).toBe('sign-in-needed');
});
