import { afterEach, beforeEach, expect, test } from 'vitest';
import {
  answerSecondFactor,
  createVerifiedPerson,
  enrolSecondFactor,
  loadActor,
  setAdmin,
  signIn,
} from '../../../src/lib/server/auth/index.ts';
import { aBrowser } from '../../support/auth.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aCompany, aMember, aPerson } from '../../support/people.ts';

let t: TestDatabase;
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

test('an account becomes an admin and is one no longer', async () => {
  const person = await aPerson(t.db);
  await setAdmin(t.db, person.email.toUpperCase(), true);
  expect((await loadActor(t.db, person.userId)).isAdmin).toBe(true);
  await setAdmin(t.db, person.email, false);
  expect((await loadActor(t.db, person.userId)).isAdmin).toBe(false);
});

test('members of a company, unconfirmed and unknown addresses do not become admins', async () => {
  const member = await aMember(t.db, await aCompany(t.db, 'buyer'), ['technician']);
  const unconfirmed = await aPerson(t.db, { emailVerified: false });
  await expect(setAdmin(t.db, member.email, true)).rejects.toThrow(/Members of a company/);
  await expect(setAdmin(t.db, unconfirmed.email, true)).rejects.toThrow(/not confirmed/);
  await expect(setAdmin(t.db, 'nobody@works.example', true)).rejects.toThrow(/no account/);
  expect((await loadActor(t.db, member.userId)).isAdmin).toBe(false);
});

test('a second factor given by command is asked for at sign-in', async () => {
  const browser = aBrowser(t.db);
  const account = { name: 'Admin', email: 'admin@coilyard.example', password: 'quench ring otter' };
  const id = await createVerifiedPerson(t.db, browser.auth, account);
  expect(await createVerifiedPerson(t.db, browser.auth, { ...account, password: 'another one here' })).toBe(
    id,
  );
  const { backupCodes } = await enrolSecondFactor(t.db, browser.auth, id);
  expect(await signIn(browser, { ...account, remember: true })).toBe('second-factor');
  await answerSecondFactor(browser, { code: backupCodes[3] ?? '', backup: true, trustDevice: false });
  expect(browser.cookies.has('__Host-coilyard')).toBe(true);
});
