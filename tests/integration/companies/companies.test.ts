import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import {
  addAddress,
  archiveAddress,
  changeRoles,
  companyPage,
  createCompany,
  removeMember,
  setApprovalLimit,
  updateAddress,
  updateCompany,
} from '../../../src/lib/server/companies/index.ts';
import { company, companyAddress, membership } from '../../../src/lib/server/db/schema/companies.ts';
import { auditEvent, notification } from '../../../src/lib/server/db/schema/platform.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { drainMails } from '../../support/mail.ts';
import { aCompany, actorFor, aMember, anAdmin, aPerson } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let t: TestDatabase;
let companyId: string;
let owner: Actor;
let engineer: Actor;
let outsider: Actor;

beforeEach(async () => {
  t = await testDatabase();
  companyId = await aCompany(t.db, 'buyer', { name: 'Fennick Shrink & Fit' });
  owner = await aMember(t.db, companyId, ['owner'], { name: 'Fennick owner' });
  engineer = await aMember(t.db, companyId, ['engineer']);
  outsider = await aMember(t.db, await aCompany(t.db, 'buyer'), ['owner']);
});
afterEach(() => t.close());

const input = (name = 'Ninefold Inductors') => ({
  commandId: newId(),
  kind: 'fabricator' as const,
  name,
  currency: 'GBP' as const,
  timeZone: 'Europe/London',
});
const companyRow = async () => (await t.db.select().from(company).where(eq(company.id, companyId)))[0];
const membershipOf = async (actor: Actor) => {
  const [row] = await t.db.select().from(membership).where(eq(membership.userId, actor.userId));
  if (!row) throw new Error('no membership');
  return row;
};
const actions = async () => (await t.db.select().from(auditEvent)).map((e) => e.action);

test('who makes a company is its owner; a fabricator starts unverified', async () => {
  const person = await aPerson(t.db);
  const id = await createCompany(t.db, person, input());
  expect((await actorFor(t.db, person.userId)).memberships).toEqual([
    {
      companyId: id,
      companyName: 'Ninefold Inductors',
      kind: 'fabricator',
      roles: ['owner'],
      verified: false,
    },
  ]);
  expect(await actions()).toEqual(['company.create']);
});

test('the same command makes one company, also when both arrive at once', async () => {
  const person = await aPerson(t.db);
  const command = input();
  const ids = await Promise.all([createCompany(t.db, person, command), createCompany(t.db, person, command)]);
  expect(ids[0]).toBe(ids[1]);
  expect((await actorFor(t.db, person.userId)).memberships).toHaveLength(1);
});

test('no company without a confirmed address, for admins, or under a name that is taken in any case', async () => {
  const before = await t.db.select().from(company);
  const unconfirmed = await aPerson(t.db, { emailVerified: false });
  expect(await refusalCode(createCompany(t.db, unconfirmed, input()))).toBe('email-not-verified');
  expect(await refusalCode(createCompany(t.db, await anAdmin(t.db), input()))).toBe('not-allowed');
  const taken = await refusal(createCompany(t.db, await aPerson(t.db), input('FENNICK Shrink & Fit')));
  expect(taken.fields).toHaveProperty('name');
  expect(await t.db.select().from(company)).toEqual(before);
});

test('owners change the company; an older version is a conflict with the newer state', async () => {
  const values = {
    companyId,
    name: 'Fennick Fits',
    timeZone: 'UTC',
    taxNumber: 'X1',
    website: '',
    about: 'Seats.',
  };
  await updateCompany(t.db, owner, { ...values, version: 1 });
  expect(await companyRow()).toMatchObject({ name: 'Fennick Fits', taxNumber: 'X1', version: 2 });
  const conflict = await refusal(updateCompany(t.db, owner, { ...values, name: 'Older', version: 1 }));
  expect(conflict.code).toBe('version-conflict');
  expect(conflict.data).toMatchObject({ name: 'Fennick Fits', version: 2 });
  expect(await companyRow()).toMatchObject({ name: 'Fennick Fits' });
});

test('the approval limit is the owner’s, and a buyer’s only', async () => {
  await setApprovalLimit(t.db, owner, { companyId, approvalLimit: 500_000, version: 1 });
  expect(await companyRow()).toMatchObject({ approvalLimit: 500_000 });
  const works = await aCompany(t.db, 'fabricator');
  const maker = await aMember(t.db, works, ['owner']);
  expect(
    await refusalCode(setApprovalLimit(t.db, maker, { companyId: works, approvalLimit: 1, version: 1 })),
  ).toBe('state-conflict');
});

test('outsiders find nothing, lesser roles and admins are refused, and nothing changes', async () => {
  const admin = await anAdmin(t.db);
  const address = {
    name: 'Gate 3',
    line1: 'Hill Road 1',
    line2: '',
    postalCode: '1',
    city: 'Fen',
    region: '',
    country: 'GB',
  };
  const addressId = await addAddress(t.db, owner, { companyId, purpose: 'works', address });
  const member = await membershipOf(owner);
  const acts: ((actor: Actor) => Promise<unknown>)[] = [
    (a) =>
      updateCompany(t.db, a, {
        companyId,
        name: 'X',
        timeZone: 'UTC',
        taxNumber: '',
        website: '',
        about: '',
        version: 1,
      }),
    (a) => setApprovalLimit(t.db, a, { companyId, approvalLimit: 1, version: 1 }),
    (a) => addAddress(t.db, a, { companyId, purpose: 'works', address }),
    (a) => updateAddress(t.db, a, { companyId, addressId, purpose: 'delivery', address, version: 1 }),
    (a) => archiveAddress(t.db, a, { companyId, addressId, version: 1 }),
    (a) => changeRoles(t.db, a, { companyId, membershipId: member.id, roles: ['engineer'], version: 1 }),
    (a) => removeMember(t.db, a, { companyId, membershipId: member.id, version: 1 }),
  ];
  const state = async () => [
    await t.db.select().from(company),
    await t.db.select().from(membership),
    await t.db.select().from(companyAddress),
    await t.db.select().from(auditEvent),
  ];
  const before = await state();
  for (const [index, act] of acts.entries()) {
    expect(await refusalCode(act(outsider)), `act ${index} by an outsider`).toBe('not-found');
    expect(await refusalCode(act(engineer)), `act ${index} by an engineer`).toBe('not-allowed');
    expect(await refusalCode(act(admin)), `act ${index} by an admin`).toBe('not-found');
  }
  expect(await state()).toEqual(before);
});

test('what belongs to another company is not found, even by an owner who names the own one', async () => {
  const strangers = await membershipOf(outsider);
  const own = { companyId, membershipId: strangers.id, version: 1 };
  expect(await refusalCode(changeRoles(t.db, owner, { ...own, roles: ['owner'] }))).toBe('not-found');
  expect(await refusalCode(removeMember(t.db, owner, own))).toBe('not-found');
  expect(await membershipOf(outsider)).toEqual(strangers);
});

test('roles are changed by owners, kept in order, told to the member, and belong to the kind', async () => {
  const member = await membershipOf(engineer);
  const act = { companyId, membershipId: member.id, version: 1 };
  const foreign = await refusal(changeRoles(t.db, owner, { ...act, roles: ['estimator'] }));
  expect(foreign.fields['roles']).toMatch(/no role “Estimator”/);
  await changeRoles(t.db, owner, { ...act, roles: ['purchaser', 'engineer', 'engineer'] });
  expect((await membershipOf(engineer)).roles).toEqual(['engineer', 'purchaser']);
  const conflict = await refusal(changeRoles(t.db, owner, { ...act, roles: ['technician'] }));
  expect(conflict.code).toBe('version-conflict');
  expect((await drainMails(t.db)).map((m) => m.to)).toEqual([engineer.email]);
  expect((await t.db.select().from(notification)).map((n) => n.userId)).toEqual([engineer.userId]);
});

test('the last owner stays one, also when two owners step down at once', async () => {
  const member = await membershipOf(owner);
  const act = { companyId, membershipId: member.id, version: 1 };
  expect(await refusalCode(changeRoles(t.db, owner, { ...act, roles: ['engineer'] }))).toBe('state-conflict');
  expect(await refusalCode(removeMember(t.db, owner, act))).toBe('state-conflict');
  const second = await aMember(t.db, companyId, ['owner']);
  const other = await membershipOf(second);
  const results = await Promise.allSettled([
    removeMember(t.db, owner, act),
    removeMember(t.db, second, { companyId, membershipId: other.id, version: 1 }),
  ]);
  expect(results.map((r) => r.status).sort()).toEqual(['fulfilled', 'rejected']);
  const left = (await t.db.select().from(membership).where(eq(membership.companyId, companyId))).filter(
    (m) => m.active && m.roles.includes('owner'),
  );
  expect(left).toHaveLength(1);
});

test('a removed member loses the company at once and is told; leaving is everyone’s own', async () => {
  const member = await membershipOf(engineer);
  await removeMember(t.db, owner, { companyId, membershipId: member.id, version: 1 });
  expect((await actorFor(t.db, engineer.userId)).memberships).toEqual([]);
  expect(await refusalCode(companyPage(t.db, await actorFor(t.db, engineer.userId), companyId))).toBe(
    'not-found',
  );
  expect((await drainMails(t.db)).map((m) => m.subject)).toEqual([
    'You are no longer a member of Fennick Shrink & Fit',
  ]);

  const technician = await aMember(t.db, companyId, ['technician']);
  const own = await membershipOf(technician);
  await removeMember(t.db, technician, { companyId, membershipId: own.id, version: 1 });
  expect(await drainMails(t.db)).toEqual([]);
  expect(await actions()).toEqual(['membership.remove', 'membership.leave']);
});

test('members see the company, its people and addresses; invitations only who handles them', async () => {
  const page = await companyPage(t.db, engineer, companyId);
  expect(page.members.map((m) => m.name)).toContain('Fennick owner');
  expect(page).not.toHaveProperty('commandId');
  expect(await refusalCode(companyPage(t.db, outsider, companyId))).toBe('not-found');
});

test('an address changes with its version and leaves the list without being deleted', async () => {
  const address = {
    name: 'Gate 3',
    line1: 'Hill Road 1',
    line2: '',
    postalCode: 'FN1 2AB',
    city: 'Fennick',
    region: '',
    country: 'GB',
  };
  const addressId = await addAddress(t.db, owner, { companyId, purpose: 'delivery', address });
  const change = { companyId, addressId, purpose: 'works' as const, address: { ...address, city: 'Fen' } };
  await updateAddress(t.db, owner, { ...change, version: 1 });
  const conflict = await refusal(updateAddress(t.db, owner, { ...change, version: 1 }));
  expect(conflict.data).toMatchObject({ city: 'Fen', purpose: 'works', version: 2 });
  await archiveAddress(t.db, owner, { companyId, addressId, version: 2 });
  expect((await companyPage(t.db, owner, companyId)).addresses).toEqual([]);
  expect(await t.db.select().from(companyAddress)).toHaveLength(1);
});
