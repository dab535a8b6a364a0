import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { dayMs } from '../../../src/lib/domain/dates.ts';
import { moveClock } from '../../../src/lib/server/adapters/clock.ts';
import {
  acceptInvitation,
  companyPage,
  invitationByToken,
  invitationsTo,
  invite,
  removeMember,
  withdrawInvitation,
} from '../../../src/lib/server/companies/index.ts';
import { invitation, membership } from '../../../src/lib/server/db/schema/companies.ts';
import { outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { drainMails, pathIn } from '../../support/mail.ts';
import { aCompany, actorFor, aMember, anAdmin, aPerson } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let t: TestDatabase;
let companyId: string;
let owner: Actor;

beforeEach(async () => {
  t = await testDatabase();
  companyId = await aCompany(t.db, 'fabricator', { name: 'Tallow Bend Shop' });
  owner = await aMember(t.db, companyId, ['owner'], { name: 'Tallow owner' });
});
afterEach(() => t.close());

const email = 'builder@tallow.example';
const ask = { email, roles: ['builder' as const] };

async function invitedToken(): Promise<string> {
  await invite(t.db, owner, { companyId, ...ask });
  const mail = (await drainMails(t.db)).find((m) => m.to === email);
  return pathIn(mail).pathname.replace('/invitations/', '');
}

test('the invited person joins with the roles of the invitation, and the owner is told', async () => {
  const token = await invitedToken();
  expect(await invitationByToken(t.db, token)).toMatchObject({
    state: 'open',
    companyName: 'Tallow Bend Shop',
    roles: ['builder'],
    inviter: 'Tallow owner',
  });
  const person = await aPerson(t.db, { email });
  expect(await acceptInvitation(t.db, person, token)).toBe(companyId);
  expect((await actorFor(t.db, person.userId)).memberships).toMatchObject([
    { companyId, roles: ['builder'] },
  ]);
  expect((await drainMails(t.db)).map((m) => m.to)).toContain(owner.email);
  expect(await refusalCode(acceptInvitation(t.db, person, token))).toBe('state-conflict');
});

test('a forwarded invitation is worth nothing to another person, nor to one whose address is not confirmed', async () => {
  const token = await invitedToken();
  const other = await aPerson(t.db, { email: 'other@tallow.example' });
  const unconfirmed = await aPerson(t.db, { email, emailVerified: false });
  expect(await refusalCode(acceptInvitation(t.db, other, token))).toBe('not-allowed');
  expect(await refusalCode(acceptInvitation(t.db, unconfirmed, token))).toBe('email-not-verified');
  expect(await refusalCode(acceptInvitation(t.db, await anAdmin(t.db), token))).toBe('not-allowed');
  expect(await t.db.select().from(membership).where(eq(membership.companyId, companyId))).toHaveLength(1);
  expect((await t.db.select().from(invitation))[0]).toMatchObject({ state: 'open', acceptedBy: null });
});

test('the token is neither in the tables nor readable in the outbox', async () => {
  await invite(t.db, owner, { companyId, ...ask });
  const [mail] = await t.db.select().from(outboxMail);
  expect(mail?.secret).toBe(true);
  const dump = JSON.stringify([await t.db.select().from(invitation), mail]);
  const [sent] = await drainMails(t.db);
  expect(dump).not.toContain(pathIn(sent).pathname.replace('/invitations/', ''));
});

test('an invitation runs out after two weeks and can then be sent anew', async () => {
  const token = await invitedToken();
  const person = await aPerson(t.db, { email });
  await moveClock(t.db, 14 * dayMs + 1000);
  expect((await invitationByToken(t.db, token)).state).toBe('expired');
  expect(await refusalCode(acceptInvitation(t.db, person, token))).toBe('state-conflict');
  const again = await invitedToken();
  await acceptInvitation(t.db, person, again);
  expect((await invitationByToken(t.db, token)).state).toBe('withdrawn');
});

test('a withdrawn invitation does not open; withdrawing needs the version that was seen', async () => {
  const token = await invitedToken();
  const [row] = (await companyPage(t.db, owner, companyId)).invitations;
  const act = { companyId, invitationId: row?.id ?? '', version: 1 };
  expect(await refusalCode(withdrawInvitation(t.db, owner, { ...act, version: 9 }))).toBe('version-conflict');
  await withdrawInvitation(t.db, owner, act);
  expect(await refusalCode(acceptInvitation(t.db, await aPerson(t.db, { email }), token))).toBe(
    'state-conflict',
  );
  expect(await refusalCode(withdrawInvitation(t.db, owner, act))).toBe('state-conflict');
});

test('one open invitation per person, also when two owners invite at once; members are not invited', async () => {
  const second = await aMember(t.db, companyId, ['owner']);
  const results = await Promise.allSettled([
    invite(t.db, owner, { companyId, ...ask }),
    invite(t.db, second, { companyId, ...ask, email: ` ${email.toUpperCase()} ` }),
  ]);
  expect(results.map((r) => r.status).sort()).toEqual(['fulfilled', 'rejected']);
  const member = await refusal(invite(t.db, owner, { companyId, email: second.email, roles: ['builder'] }));
  expect(member.fields).toHaveProperty('email');
});

test('only owners invite and withdraw; outsiders find nothing; nothing is written', async () => {
  const builder = await aMember(t.db, companyId, ['builder', 'estimator']);
  const outsider = await aMember(t.db, await aCompany(t.db, 'fabricator'), ['owner']);
  await invite(t.db, owner, { companyId, ...ask });
  const [row] = await t.db.select().from(invitation);
  const before = [await t.db.select().from(invitation), await t.db.select().from(outboxMail)];
  const withdraw = { companyId, invitationId: row?.id ?? '', version: 1 };
  const more = { companyId, email: 'more@tallow.example', roles: ['builder' as const] };
  expect(await refusalCode(invite(t.db, builder, more))).toBe('not-allowed');
  expect(await refusalCode(invite(t.db, outsider, more))).toBe('not-found');
  expect(await refusalCode(withdrawInvitation(t.db, builder, withdraw))).toBe('not-allowed');
  expect(await refusalCode(withdrawInvitation(t.db, outsider, withdraw))).toBe('not-found');
  expect([await t.db.select().from(invitation), await t.db.select().from(outboxMail)]).toEqual(before);
  expect((await companyPage(t.db, builder, companyId)).invitations).toEqual([]);
});

test('who was removed can be invited back and has the new roles only', async () => {
  const person = await aPerson(t.db, { email });
  await acceptInvitation(t.db, person, await invitedToken());
  const [member] = await t.db.select().from(membership).where(eq(membership.userId, person.userId));
  await removeMember(t.db, owner, { companyId, membershipId: member?.id ?? '', version: 1 });
  await invite(t.db, owner, { companyId, email, roles: ['estimator'] });
  const mails = await drainMails(t.db);
  const token = pathIn(mails.find((m) => m.subject.includes('invites'))).pathname.replace(
    '/invitations/',
    '',
  );
  await acceptInvitation(t.db, person, token);
  expect((await actorFor(t.db, person.userId)).memberships).toMatchObject([{ roles: ['estimator'] }]);
  expect(await t.db.select().from(membership).where(eq(membership.userId, person.userId))).toHaveLength(1);
});

test('the invited person finds the invitation without the mail; its id opens nothing for others', async () => {
  await invite(t.db, owner, { companyId, ...ask });
  const person = await aPerson(t.db, { email });
  const other = await aPerson(t.db);
  const [own] = await invitationsTo(t.db, person);
  if (!own) throw new Error('not found');
  expect(own.companyName).toBe('Tallow Bend Shop');
  expect(await invitationsTo(t.db, other)).toEqual([]);
  expect(await refusalCode(invitationByToken(t.db, own.id, other))).toBe('not-found');
  expect(await refusalCode(invitationByToken(t.db, own.id))).toBe('not-found');
  expect(await refusalCode(acceptInvitation(t.db, other, own.id))).toBe('not-found');
  expect((await invitationByToken(t.db, own.id, person)).state).toBe('open');
  expect(await acceptInvitation(t.db, person, own.id)).toBe(companyId);
});

test('an unknown token tells nothing', async () => {
  expect(await refusalCode(invitationByToken(t.db, 'no-such-token'))).toBe('not-found');
});
