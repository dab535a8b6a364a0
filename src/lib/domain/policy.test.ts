import { expect, test } from 'vitest';
import type { Actor } from './actor.ts';
import { permissions, type Permission } from './permissions.ts';
import { can } from './policy.ts';
import { buyerRoles, fabricatorRoles, type CompanyKind, type Role } from './roles.ts';

const actor = (
  memberships: { companyId: string; kind: CompanyKind; roles: Role[]; verified?: boolean }[],
  isAdmin = false,
): Actor => ({
  userId: 'u',
  name: 'n',
  email: 'e@works.example',
  emailVerified: true,
  isAdmin,
  memberships: memberships.map((m) => ({ companyName: m.companyId, verified: m.kind === 'buyer', ...m })),
  timeZone: 'UTC',
  unitSet: 'metric',
  requestId: null,
});

const allRoles = (kind: CompanyKind) => [...(kind === 'buyer' ? buyerRoles : fabricatorRoles)];

/** Open to every member of some company (the board: of a verified fabricator), with no object of their own. */
const shared: readonly Permission[] = ['board.view', 'directory.view'];

test('nobody, and a person without a company, may do nothing', () => {
  const object = { companyId: 'a', buyerCompanyId: 'a', fabricatorCompanyId: 'b' };
  for (const permission of permissions) {
    expect(can(null, permission, object), permission).toBe(false);
    expect(can(actor([]), permission, object), permission).toBe(false);
  }
});

test('all roles of another company give nothing, whatever the permission', () => {
  const stranger = actor([
    { companyId: 'x', kind: 'buyer', roles: allRoles('buyer') },
    { companyId: 'y', kind: 'fabricator', roles: allRoles('fabricator'), verified: true },
  ]);
  for (const permission of permissions.filter((p) => !shared.includes(p))) {
    for (const object of [
      { companyId: 'a' },
      { buyerCompanyId: 'a', fabricatorCompanyId: 'b' },
      // The sides exchanged: a buyer never acts as the fabricator, nor the other way round.
      { buyerCompanyId: 'y', fabricatorCompanyId: 'x' },
    ]) {
      expect(can(stranger, permission, object), `${permission} ${JSON.stringify(object)}`).toBe(false);
    }
  }
});

test('an object without a company is nobody’s, except what is open to all members', () => {
  const member = actor([
    { companyId: 'y', kind: 'fabricator', roles: allRoles('fabricator'), verified: true },
  ]);
  for (const permission of permissions) {
    for (const object of [{}, { companyId: null }, { companyId: '' }]) {
      expect(can(member, permission, object), permission).toBe(shared.includes(permission));
    }
  }
});

test('an admin views companies and runs the platform, and holds no right of a party', () => {
  const admin = actor([], true);
  const object = { companyId: 'a', buyerCompanyId: 'a', fabricatorCompanyId: 'b' };
  const allowed = permissions.filter((permission) => can(admin, permission, object));
  expect(allowed.filter((p) => !p.startsWith('admin.'))).toEqual(['company.view', 'directory.view']);
  expect(allowed).toContain('admin.operate');
});

test('an unverified fabricator neither sees the board nor asks nor bids', () => {
  const unverified = actor([
    { companyId: 'y', kind: 'fabricator', roles: allRoles('fabricator'), verified: false },
  ]);
  for (const permission of ['board.view', 'question.ask', 'bid.edit'] as const) {
    expect(can(unverified, permission, { companyId: 'y' }), permission).toBe(false);
  }
  expect(can(unverified, 'bid.view-own', { companyId: 'y' })).toBe(true);
});

test('money moves by owners and purchasers only; a second approver is another person', () => {
  for (const role of buyerRoles) {
    const member = actor([{ companyId: 'a', kind: 'buyer', roles: [role] }]);
    const order = { buyerCompanyId: 'a', fabricatorCompanyId: 'b' };
    const expected = role === 'owner' || role === 'purchaser';
    expect(can(member, 'milestone.release', order), role).toBe(expected);
    expect(can(member, 'milestone.fund', order), role).toBe(expected);
    expect(can(member, 'award.make', { companyId: 'a' }), role).toBe(expected);
    expect(can(member, 'award.approve', { companyId: 'a', notUserId: 'other' }), role).toBe(expected);
    expect(can(member, 'award.approve', { companyId: 'a', notUserId: 'u' }), role).toBe(false);
  }
});
