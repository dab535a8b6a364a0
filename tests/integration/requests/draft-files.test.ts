import { afterEach, beforeEach, expect, it } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { requestFile } from '../../../src/lib/server/db/schema/requests.ts';
import { attachFile, detachFile } from '../../../src/lib/server/requests/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aFullDraft } from '../../support/drafts.ts';
import { aCleanFile } from '../../support/orders.ts';
import { aCompany, aMember } from '../../support/people.ts';

let test: TestDatabase;
let companyId: string;
let engineer: Actor;
let requestId: string;

const attached = () => test.db.select().from(requestFile);

beforeEach(async () => {
  test = await testDatabase();
  companyId = await aCompany(test.db, 'buyer');
  engineer = await aMember(test.db, companyId, ['engineer']);
  requestId = (await aFullDraft(test.db, engineer, companyId)).id;
});
afterEach(() => test.close());

it('a verified sketch is attached once, and taken off again', async () => {
  const fileId = await aCleanFile(test.db, engineer, companyId, 'request-sketch');
  await attachFile(test.db, engineer, { requestId, fileId });
  await attachFile(test.db, engineer, { requestId, fileId });
  expect((await attached()).map((row) => row.kind)).toEqual(['request-sketch']);
  await detachFile(test.db, engineer, { requestId, fileId });
  expect(await attached()).toEqual([]);
});

it('a file of another company or for another purpose is not attached', async () => {
  const otherId = await aCompany(test.db, 'buyer');
  const other = await aMember(test.db, otherId, ['engineer']);
  const theirs = await aCleanFile(test.db, other, otherId, 'request-sketch');
  const photo = await aCleanFile(test.db, engineer, companyId, 'as-built-photo');
  for (const fileId of [theirs, photo]) {
    await expect(attachFile(test.db, engineer, { requestId, fileId })).rejects.toMatchObject({
      code: 'invalid-input',
    });
  }
  expect(await attached()).toEqual([]);
});

it('is refused to a lesser role and to an outsider, and nothing changes', async () => {
  const fileId = await aCleanFile(test.db, engineer, companyId, 'request-sketch');
  const technician = await aMember(test.db, companyId, ['technician']);
  const outsider = await aMember(test.db, await aCompany(test.db, 'buyer'), ['owner']);
  await expect(attachFile(test.db, technician, { requestId, fileId })).rejects.toMatchObject({
    code: 'not-allowed',
  });
  await expect(attachFile(test.db, outsider, { requestId, fileId })).rejects.toMatchObject({
    code: 'not-found',
  });
  await attachFile(test.db, engineer, { requestId, fileId });
  await expect(detachFile(test.db, technician, { requestId, fileId })).rejects.toMatchObject({
    code: 'not-allowed',
  });
  expect(await attached()).toHaveLength(1);
});
