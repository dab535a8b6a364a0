import { expect, test } from 'vitest';
import { changeRoles, invite } from '../../../src/lib/server/companies/index.ts';
import { membership } from '../../../src/lib/server/db/schema/companies.ts';
import { deskOf } from '../../../src/lib/server/workflows/desk.ts';
import { eq } from 'drizzle-orm';
import { testDatabase } from '../../support/db.ts';
import { aCompany, aMember, aPerson } from '../../support/people.ts';

test('the desk of somebody new is empty', async () => {
  const { db, close } = await testDatabase();
  expect(await deskOf(db, await aPerson(db))).toEqual({ mine: [], others: [], recent: [] });
  close();
});

test('an invitation waits for the invited person on their desk and for others on the owner’s', async () => {
  const { db, close } = await testDatabase();
  const companyId = await aCompany(db, 'fabricator', { name: 'Copperfold Works' });
  const owner = await aMember(db, companyId, ['owner']);
  const builder = await aMember(db, companyId, ['builder']);
  const person = await aPerson(db, { email: 'new@copperfold.example' });
  await invite(db, owner, { companyId, email: person.email, roles: ['estimator'] });
  expect((await deskOf(db, person)).mine).toMatchObject([
    { title: 'Answer the invitation of Copperfold Works', waitsFor: 'me' },
  ]);
  const desk = await deskOf(db, owner);
  expect(desk.others).toMatchObject([{ who: person.email, waitsFor: 'others' }]);
  // Not verified yet: that waits for the owner.
  expect(desk.mine).toMatchObject([{ href: `/companies/${companyId}/verification` }]);
  expect((await deskOf(db, builder)).others).toEqual([]);
  close();
});

test('the most pressing comes first, undated things last, and recent events show what is unread', async () => {
  const { db, close } = await testDatabase();
  const companyId = await aCompany(db, 'buyer');
  const owner = await aMember(db, companyId, ['owner']);
  const member = await aMember(db, companyId, ['engineer']);
  const [row] = await db.select().from(membership).where(eq(membership.userId, member.userId));
  await changeRoles(db, owner, { companyId, membershipId: row?.id ?? '', roles: ['purchaser'], version: 1 });
  const item = { title: 't', detail: 'd', href: '/x', waitsFor: 'me' as const };
  const desk = await deskOf(db, member, [
    () => Promise.resolve([{ ...item, id: 'c', dueAt: null }]),
    () =>
      Promise.resolve([
        { ...item, id: 'b', dueAt: 2 },
        { ...item, id: 'a', dueAt: 1 },
      ]),
  ]);
  expect(desk.mine.map((i) => i.id)).toEqual(['a', 'b', 'c']);
  expect(desk.recent).toMatchObject([{ unread: true, href: `/companies/${companyId}` }]);
  close();
});
