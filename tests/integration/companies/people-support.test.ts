import { expect, test } from 'vitest';
import { testDatabase } from '../../support/db.ts';
import { aCompany, aMember, anAdmin } from '../../support/people.ts';

test('builders make actors that carry their company, roles and verification', async () => {
  const { db, close } = await testDatabase();
  const id = await aCompany(db, 'fabricator', { verified: true });
  const estimator = await aMember(db, id, ['estimator']);
  expect(estimator.memberships).toMatchObject([{ companyId: id, kind: 'fabricator', verified: true }]);
  const unverified = await aMember(db, await aCompany(db, 'fabricator'), ['owner']);
  expect(unverified.memberships[0]?.verified).toBe(false);
  expect((await anAdmin(db)).isAdmin).toBe(true);
  close();
});
