import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { addDays, dateIn } from '../../../src/lib/domain/dates.ts';
import { businessNow } from '../../../src/lib/server/adapters/clock.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import { verificationCase } from '../../../src/lib/server/db/schema/verification.ts';
import {
  addCompanyDocument,
  archiveCompanyDocument,
  fileLink,
  listCompanyDocuments,
} from '../../../src/lib/server/files/index.ts';
import {
  askForVerification,
  fabricatorPage,
  listFabricators,
  verificationCaseFor,
  verifyFabricator,
} from '../../../src/lib/server/verification/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aProfile } from '../../support/fabricators.ts';
import { anUploadedFile, testStore, type TestStore } from '../../support/files.ts';
import { aCompany, aMember, anAdmin, aPerson } from '../../support/people.ts';

let objects: TestStore;
let t: TestDatabase;
let shopId: string;
let owner: Actor;
let admin: Actor;

beforeAll(async () => {
  objects = await testStore();
});
afterAll(() => objects.close());

beforeEach(async () => {
  t = await testDatabase();
  shopId = await aCompany(t.db, 'fabricator', { name: 'Fennel Row Coils' });
  owner = await aMember(t.db, shopId, ['owner']);
  admin = await anAdmin(t.db);
});
afterEach(() => t.close());

async function aDocument(who: Actor = owner, companyId = shopId): Promise<string> {
  const fileId = await anUploadedFile(t.db, objects.store, who, { companyId, purpose: 'company-document' });
  const input = { file: fileId, title: 'Register extract', kind: 'registration' as const };
  return (await addCompanyDocument(t.db, who, companyId, input)).id;
}

async function asked(documents?: string[]): Promise<string> {
  const { caseId } = await askForVerification(t.db, owner, shopId, {
    profile: aProfile(),
    commandId: newId(),
    documents: documents ?? [await aDocument()],
  });
  return caseId;
}

const cases = () => t.db.select().from(verificationCase);
const versionOf = async (id: string) => (await cases()).find((row) => row.id === id)?.version ?? 0;
const inDays = async (days: number) => addDays(dateIn('Europe/Berlin', await businessNow(t.db)), days);

async function verified(days = 365): Promise<string> {
  const caseId = await asked();
  await verifyFabricator(t.db, admin, caseId, {
    version: await versionOf(caseId),
    items: ['legal-entity', 'works-address'],
    untilDate: await inDays(days),
    reasons: '',
  });
  return caseId;
}

describe('papers of a company', () => {
  test('outsiders and technicians see, add and archive nothing', async () => {
    const documentId = await aDocument();
    const fileId = await anUploadedFile(t.db, objects.store, owner, {
      companyId: shopId,
      purpose: 'company-document',
    });
    const buyerId = await aCompany(t.db, 'buyer');
    const outsider = await aMember(t.db, buyerId, ['owner']);
    const paper = { file: fileId, title: 'Another', kind: 'other' as const };
    for (const who of [outsider, admin, await aPerson(t.db)]) {
      const refused = { code: 'not-found' };
      await expect(listCompanyDocuments(t.db, who, shopId)).rejects.toMatchObject(refused);
      await expect(addCompanyDocument(t.db, who, shopId, paper)).rejects.toMatchObject(refused);
      await expect(
        archiveCompanyDocument(t.db, who, shopId, { documentId, version: 1 }),
      ).rejects.toMatchObject(refused);
    }
    // A file of one company can not become a paper of another.
    await expect(addCompanyDocument(t.db, outsider, buyerId, paper)).rejects.toMatchObject({
      code: 'invalid-input',
    });
    const technician = await aMember(t.db, buyerId, ['technician']);
    await expect(listCompanyDocuments(t.db, technician, buyerId)).rejects.toMatchObject({
      code: 'not-allowed',
    });
    expect(await listCompanyDocuments(t.db, owner, shopId)).toMatchObject([
      { id: documentId, archivedAt: null },
    ]);
  });

  test('an admin reads a paper only once it was named in an asking, and the audit trail tells it', async () => {
    const documentId = await aDocument();
    const [paper] = await listCompanyDocuments(t.db, owner, shopId);
    const read = () => fileLink(t.db, admin, paper?.fileId ?? '', objects.store);
    await expect(read()).rejects.toMatchObject({ code: 'not-found' });
    await asked([documentId]);
    await expect(read()).resolves.toMatchObject({ name: 'paper.pdf' });
    const told = await t.db.select().from(auditEvent).where(eq(auditEvent.action, 'file.read-by-admin'));
    expect(told).toMatchObject([{ actorUserId: admin.userId, companyId: shopId }]);
  });

  test('an archived paper leaves the list and stays in the case that named it', async () => {
    const documentId = await aDocument();
    const caseId = await asked([documentId]);
    await expect(
      archiveCompanyDocument(t.db, owner, shopId, { documentId, version: 7 }),
    ).rejects.toMatchObject({ code: 'version-conflict' });
    await archiveCompanyDocument(t.db, owner, shopId, { documentId, version: 1 });
    expect(await listCompanyDocuments(t.db, owner, shopId)).toEqual([]);
    expect(await listCompanyDocuments(t.db, owner, shopId, { archived: true })).toHaveLength(1);
    expect((await verificationCaseFor(t.db, admin, caseId)).documents).toMatchObject([{ id: documentId }]);
  });
});

describe('directory', () => {
  const all = { q: '', shape: null, after: null };

  test('lists verified fabricators to signed-in members, by what they make and by words', async () => {
    const buyer = await aMember(t.db, await aCompany(t.db, 'buyer'), ['engineer']);
    expect((await listFabricators(t.db, buyer, all)).items).toEqual([]);
    await verified();
    await aCompany(t.db, 'fabricator', { name: 'Unseen Shop' });
    const { items } = await listFabricators(t.db, buyer, all);
    expect(items).toMatchObject([{ id: shopId, city: 'Anyford', country: 'GB' }]);
    expect(JSON.stringify(items)).not.toContain('4 Fennel Row');
    expect((await listFabricators(t.db, buyer, { ...all, shape: 'pancake' })).items).toHaveLength(1);
    expect((await listFabricators(t.db, buyer, { ...all, shape: 'hairpin' })).items).toHaveLength(0);
    expect((await listFabricators(t.db, buyer, { ...all, q: 'anyf' })).items).toHaveLength(1);
    expect((await listFabricators(t.db, buyer, { ...all, q: '%' })).items).toHaveLength(0);
    await expect(listFabricators(t.db, await aPerson(t.db), all)).rejects.toMatchObject({
      code: 'not-found',
    });
  });

  test('the page says what exactly was verified; an unverified shop has a page for its members only', async () => {
    const buyer = await aMember(t.db, await aCompany(t.db, 'buyer'), ['engineer']);
    await expect(fabricatorPage(t.db, buyer, shopId)).rejects.toMatchObject({ code: 'not-found' });
    expect(await fabricatorPage(t.db, owner, shopId)).toMatchObject({ verified: false, verifiedItems: [] });
    await verified();
    expect(await fabricatorPage(t.db, buyer, shopId)).toMatchObject({
      verified: true,
      verifiedItems: ['legal-entity', 'works-address'],
    });
  });

  test('pages by name without losing or repeating anyone', async () => {
    const buyer = await aMember(t.db, await aCompany(t.db, 'buyer'), ['engineer']);
    for (let n = 0; n < 35; n += 1) {
      await aCompany(t.db, 'fabricator', { name: `Shop ${String(n).padStart(2, '0')}`, verified: true });
    }
    const first = await listFabricators(t.db, buyer, all);
    const second = await listFabricators(t.db, buyer, { ...all, after: first.next });
    expect([first.items.length, second.items.length, second.next]).toEqual([30, 5, null]);
    expect(new Set([...first.items, ...second.items].map((item) => item.id)).size).toBe(35);
  });
});
