import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { file } from '../../../src/lib/server/db/schema/files.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import {
  cancelUpload,
  fileLink,
  finishUpload,
  openFileToVerified,
  requireCleanFile,
  shareFile,
  signUploadParts,
  startUpload,
  uploadState,
} from '../../../src/lib/server/files/index.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { anUploadedFile, aPdf, testStore, type TestStore } from '../../support/files.ts';
import { aCompany, aMember, anAdmin, aPerson } from '../../support/people.ts';

let objects: TestStore;
let t: TestDatabase;
let buyerId: string;
let engineer: Actor;

beforeAll(async () => {
  objects = await testStore();
});
afterAll(() => objects.close());

beforeEach(async () => {
  t = await testDatabase();
  buyerId = await aCompany(t.db, 'buyer');
  engineer = await aMember(t.db, buyerId, ['engineer']);
});
afterEach(() => t.close());

const rows = () => t.db.select().from(file);
const sketch = (name: string, size: number) => ({
  companyId: buyerId,
  purpose: 'request-sketch' as const,
  name,
  size,
});

async function send(name: string, bytes: Uint8Array<ArrayBuffer>) {
  const slot = await startUpload(t.db, engineer, sketch(name, bytes.byteLength), objects.store);
  if (slot.mode !== 'single') throw new Error('expected one slot');
  const answer = await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: bytes });
  return {
    slot,
    status: answer.status,
    finish: () => finishUpload(t.db, engineer, slot.fileId, { parts: [] }, objects.store),
  };
}

describe('who may', () => {
  test('outsiders and lesser roles start, sign, finish and cancel nothing', async () => {
    const technician = await aMember(t.db, buyerId, ['technician']);
    const outsider = await aMember(t.db, await aCompany(t.db, 'buyer'), ['owner']);
    const admin = await anAdmin(t.db);
    const { slot, finish } = await send('a.pdf', aPdf());
    for (const [who, code] of [
      [technician, 'not-allowed'],
      [outsider, 'not-found'],
      [await aPerson(t.db), 'not-found'],
      [admin, 'not-found'],
    ] as const) {
      const refused = { code };
      await expect(startUpload(t.db, who, sketch('b.pdf', 10), objects.store)).rejects.toMatchObject(refused);
      await expect(
        signUploadParts(t.db, who, slot.fileId, { numbers: [1] }, objects.store),
      ).rejects.toMatchObject(refused);
      await expect(finishUpload(t.db, who, slot.fileId, { parts: [] }, objects.store)).rejects.toMatchObject(
        refused,
      );
      await expect(uploadState(t.db, who, slot.fileId)).rejects.toMatchObject(refused);
      await expect(cancelUpload(t.db, who, slot.fileId, objects.store)).rejects.toMatchObject(refused);
    }
    const all = await rows();
    expect(all).toHaveLength(1);
    expect(all[0]?.state).toBe('pending');
    expect((await finish()).state).toBe('clean');
  });

  test('a link is for the owner, the audience and, when open, verified fabricators; for others there is nothing', async () => {
    const shopId = await aCompany(t.db, 'fabricator', { verified: true });
    const estimator = await aMember(t.db, shopId, ['estimator']);
    const unverified = await aMember(t.db, await aCompany(t.db, 'fabricator'), ['owner']);
    const otherBuyer = await aMember(t.db, await aCompany(t.db, 'buyer'), ['owner']);
    const { slot, finish } = await send('a.pdf', aPdf());
    const link = (who: Actor) => fileLink(t.db, who, slot.fileId, objects.store);
    await expect(link(engineer)).rejects.toMatchObject({ code: 'not-found' });
    await finish();
    await expect(link(engineer)).resolves.toMatchObject({ name: 'a.pdf' });
    for (const who of [estimator, unverified, otherBuyer, await anAdmin(t.db)]) {
      await expect(link(who)).rejects.toMatchObject({ code: 'not-found' });
    }
    await transact(t.db, (tx) => openFileToVerified(tx, slot.fileId));
    await expect(link(estimator)).resolves.toMatchObject({ name: 'a.pdf' });
    await expect(link(unverified)).rejects.toMatchObject({ code: 'not-found' });
    await expect(link(otherBuyer)).rejects.toMatchObject({ code: 'not-found' });
    await transact(t.db, (tx) => shareFile(tx, slot.fileId, [otherBuyer.memberships[0]?.companyId ?? '']));
    await expect(link(otherBuyer)).resolves.toMatchObject({ name: 'a.pdf' });
  });

  test('an admin reads papers of an order, told in the audit trail, and neither sketches nor bids nor kept papers', async () => {
    const admin = await anAdmin(t.db);
    const owner = await aMember(t.db, buyerId, ['owner']);
    const upload = (purpose: 'dispute-evidence' | 'request-sketch' | 'company-document') =>
      anUploadedFile(t.db, objects.store, owner, { companyId: buyerId, purpose });
    const evidence = await upload('dispute-evidence');
    await expect(fileLink(t.db, admin, evidence, objects.store)).resolves.toMatchObject({
      name: 'paper.pdf',
    });
    for (const fileId of [await upload('request-sketch'), await upload('company-document')]) {
      await expect(fileLink(t.db, admin, fileId, objects.store)).rejects.toMatchObject({ code: 'not-found' });
    }
    const told = await t.db.select().from(auditEvent).where(eq(auditEvent.action, 'file.read-by-admin'));
    expect(told).toMatchObject([{ actorUserId: admin.userId, subjectId: evidence, companyId: buyerId }]);
  });

  test('papers of a company are not for its technicians', async () => {
    const owner = await aMember(t.db, buyerId, ['owner']);
    const fileId = await anUploadedFile(t.db, objects.store, owner, {
      companyId: buyerId,
      purpose: 'company-document',
    });
    const technician = await aMember(t.db, buyerId, ['technician']);
    await expect(fileLink(t.db, technician, fileId, objects.store)).rejects.toMatchObject({
      code: 'not-found',
    });
  });

  test('another domain takes only a clean file of the right company and purpose', async () => {
    const { slot, finish } = await send('a.pdf', aPdf());
    const take = (ownerCompanyId: string, purpose: 'request-sketch' | 'bid-attachment') =>
      requireCleanFile(t.db, slot.fileId, { ownerCompanyId, purpose });
    await expect(take(buyerId, 'request-sketch')).rejects.toMatchObject({ code: 'invalid-input' });
    await finish();
    await expect(take(buyerId, 'request-sketch')).resolves.toMatchObject({ name: 'a.pdf' });
    await expect(take(buyerId, 'bid-attachment')).rejects.toMatchObject({ code: 'invalid-input' });
    await expect(take(await aCompany(t.db, 'buyer'), 'request-sketch')).rejects.toMatchObject({
      code: 'invalid-input',
    });
  });
});
