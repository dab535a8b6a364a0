import { and, eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { addDays, dateIn, dayMs } from '../../../src/lib/domain/dates.ts';
import { businessNow, moveClock } from '../../../src/lib/server/adapters/clock.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { company } from '../../../src/lib/server/db/schema/companies.ts';
import { auditEvent, notification, outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { verificationCase } from '../../../src/lib/server/db/schema/verification.ts';
import { addCompanyDocument, archiveCompanyDocument } from '../../../src/lib/server/files/index.ts';
import {
  askForVerification,
  companyVerification,
  refuseFabricator,
  revokeVerification,
  saveFabricatorProfile,
  verificationCaseFor,
  verificationQueue,
  verifyFabricator,
  withdrawAsking,
} from '../../../src/lib/server/verification/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aProfile } from '../../support/fabricators.ts';
import { anUploadedFile, testStore, type TestStore } from '../../support/files.ts';
import { aCompany, actorFor, aMember, anAdmin, aPerson } from '../../support/people.ts';

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
const mails = (kind: string) => t.db.select().from(outboxMail).where(eq(outboxMail.kind, kind));

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

describe('asking', () => {
  test('keeps what was declared at that moment, tells every admin, and stands once', async () => {
    const caseId = await asked();
    const [row] = await cases();
    expect(row).toMatchObject({
      id: caseId,
      state: 'asked',
      worksAddress: { city: 'Anyford', country: 'GB' },
      capabilities: {
        shapes: ['helix', 'pancake'],
        tubeMin: 0.004,
        coilDiameterMax: 0.6,
        coilLengthMax: null,
      },
    });
    expect(row?.capabilities.tubeMax).toBeCloseTo(0.01905, 9);
    expect(await mails('verification-asked')).toMatchObject([{ toUserId: admin.userId, subjectId: caseId }]);
    await expect(asked()).rejects.toMatchObject({ code: 'already-exists' });
    await saveFabricatorProfile(t.db, owner, shopId, aProfile({ worksCity: 'Elsewhere' }));
    expect((await cases())[0]?.worksAddress.city).toBe('Anyford');
  });

  test('the same command twice is one case', async () => {
    const input = { profile: aProfile(), commandId: newId(), documents: [await aDocument()] };
    const first = await askForVerification(t.db, owner, shopId, input);
    expect(await askForVerification(t.db, owner, shopId, input)).toEqual(first);
    expect(await cases()).toHaveLength(1);
  });

  test('names current papers of this company only', async () => {
    const otherId = await aCompany(t.db, 'fabricator');
    const foreign = await aDocument(await aMember(t.db, otherId, ['owner']), otherId);
    const archived = await aDocument();
    await archiveCompanyDocument(t.db, owner, shopId, { documentId: archived, version: 1 });
    for (const documentId of [foreign, archived, newId()]) {
      await expect(asked([documentId])).rejects.toMatchObject({
        code: 'invalid-input',
        fields: { documents: expect.any(String) as string },
      });
    }
    expect(await cases()).toHaveLength(0);
  });

  test('outsiders, lesser roles, buyers and admins ask, save and withdraw nothing', async () => {
    const caseId = await asked();
    const before = await cases();
    const builder = await aMember(t.db, shopId, ['builder', 'estimator']);
    const buyerId = await aCompany(t.db, 'buyer');
    const buyer = await aMember(t.db, buyerId, ['owner']);
    const rival = await aMember(t.db, await aCompany(t.db, 'fabricator', { verified: true }), ['owner']);
    for (const [who, code] of [
      [builder, 'not-allowed'],
      [rival, 'not-found'],
      [buyer, 'not-found'],
      [admin, 'not-found'],
      [await aPerson(t.db), 'not-found'],
    ] as const) {
      const ask = { profile: aProfile(), commandId: newId(), documents: [newId()] };
      await expect(askForVerification(t.db, who, shopId, ask)).rejects.toMatchObject({ code });
      await expect(saveFabricatorProfile(t.db, who, shopId, aProfile())).rejects.toMatchObject({ code });
      await expect(withdrawAsking(t.db, who, caseId, { version: 1 })).rejects.toMatchObject({ code });
    }
    await expect(
      askForVerification(t.db, buyer, buyerId, { profile: aProfile(), commandId: newId(), documents: [] }),
    ).rejects.toMatchObject({ code: 'not-allowed' });
    expect(await cases()).toEqual(before);
  });
});

describe('deciding', () => {
  test('verified: the company may see the board until that date, knows what was verified, and gets a mail', async () => {
    expect(owner.memberships[0]?.verified).toBe(false);
    const caseId = await verified(30);
    expect((await actorFor(t.db, owner.userId)).memberships[0]?.verified).toBe(true);
    const { history } = await companyVerification(t.db, owner, shopId);
    expect(history).toMatchObject([
      { id: caseId, state: 'verified', verifiedItems: ['legal-entity', 'works-address'] },
    ]);
    const [mail] = await mails('fabricator-verified');
    expect(mail).toMatchObject({ toEmail: owner.email, subjectId: caseId });
    expect(mail?.body).toContain('public register');
    expect(await t.db.select().from(notification).where(eq(notification.userId, owner.userId))).toMatchObject(
      [{ kind: 'fabricator-verified', href: `/companies/${shopId}/verification` }],
    );
    const trail = await t.db
      .select({ action: auditEvent.action })
      .from(auditEvent)
      .where(and(eq(auditEvent.companyId, shopId), eq(auditEvent.actorUserId, admin.userId)));
    expect(trail.map((row) => row.action)).toEqual(['verification.verify', 'company.verified-until']);
    await moveClock(t.db, 32 * dayMs);
    expect((await actorFor(t.db, owner.userId)).memberships[0]?.verified).toBe(false);
  });

  test('the date ends at midnight in the zone of the company', async () => {
    await t.db.update(company).set({ timeZone: 'America/New_York' }).where(eq(company.id, shopId));
    const caseId = await asked();
    const untilDate = await inDays(40);
    await verifyFabricator(t.db, admin, caseId, { version: 1, items: ['insurance'], untilDate, reasons: '' });
    const [row] = await t.db.select().from(company).where(eq(company.id, shopId));
    expect(dateIn('America/New_York', (row?.verifiedUntil ?? 0) - 1)).toBe(untilDate);
    expect(dateIn('America/New_York', row?.verifiedUntil ?? 0)).toBe(addDays(untilDate, 1));
  });

  test('a date in the past or beyond three years is refused and nothing changes', async () => {
    const caseId = await asked();
    for (const days of [-1, 1200]) {
      await expect(
        verifyFabricator(t.db, admin, caseId, {
          version: 1,
          items: ['insurance'],
          untilDate: await inDays(days),
          reasons: '',
        }),
      ).rejects.toMatchObject({ code: 'invalid-input', fields: { untilDate: expect.any(String) as string } });
    }
    expect((await cases())[0]).toMatchObject({ state: 'asked', version: 1 });
  });

  test('refused with reasons, then asked again', async () => {
    const caseId = await asked();
    await refuseFabricator(t.db, admin, caseId, { version: 1, reasons: 'The register extract is cut off.' });
    const [mail] = await mails('fabricator-refused');
    expect(mail).toMatchObject({ toEmail: owner.email });
    expect(mail?.body).toContain('cut off');
    expect((await actorFor(t.db, owner.userId)).memberships[0]?.verified).toBe(false);
    const again = await asked();
    expect((await cases()).map((row) => [row.id, row.state])).toEqual([
      [caseId, 'refused'],
      [again, 'asked'],
    ]);
  });

  test('a renewal that is refused leaves the verification that stands', async () => {
    await verified(200);
    const renewal = await asked();
    await refuseFabricator(t.db, admin, renewal, { version: 1, reasons: 'The insurance ran out in spring.' });
    expect((await actorFor(t.db, owner.userId)).memberships[0]?.verified).toBe(true);
  });

  test('ended before its date: no longer verified, told with reasons', async () => {
    const caseId = await verified();
    await revokeVerification(t.db, admin, caseId, {
      version: await versionOf(caseId),
      reasons: 'The works address was given up.',
    });
    const [row] = await t.db.select().from(company).where(eq(company.id, shopId));
    expect(row?.verifiedUntil).toBeNull();
    expect((await mails('fabricator-refused'))[0]?.subject).toBe('Your verification was ended');
  });

  test('two admins at once: one decides, the other is told', async () => {
    const caseId = await asked();
    const second = await anAdmin(t.db);
    const verdicts = await Promise.allSettled([
      refuseFabricator(t.db, admin, caseId, { version: 1, reasons: 'Documents are missing.' }),
      verifyFabricator(t.db, second, caseId, {
        version: 1,
        items: ['insurance'],
        untilDate: await inDays(30),
        reasons: '',
      }),
    ]);
    expect(verdicts.map((verdict) => verdict.status).sort()).toEqual(['fulfilled', 'rejected']);
    const [row] = await cases();
    expect(['refused', 'verified']).toContain(row?.state);
    expect(row?.version).toBe(2);
  });

  test('nobody but an admin sees the queue or decides', async () => {
    const caseId = await asked();
    const before = await cases();
    for (const who of [
      owner,
      await aPerson(t.db),
      await aMember(t.db, await aCompany(t.db, 'buyer'), ['owner']),
    ]) {
      const refused = { code: 'not-found' };
      await expect(verificationQueue(t.db, who, 'waiting')).rejects.toMatchObject(refused);
      await expect(verificationCaseFor(t.db, who, caseId)).rejects.toMatchObject(refused);
      await expect(
        refuseFabricator(t.db, who, caseId, { version: 1, reasons: 'because I can' }),
      ).rejects.toMatchObject(refused);
      await expect(
        verifyFabricator(t.db, who, caseId, {
          version: 1,
          items: ['insurance'],
          untilDate: await inDays(30),
          reasons: '',
        }),
      ).rejects.toMatchObject(refused);
      await expect(
        revokeVerification(t.db, who, caseId, { version: 1, reasons: 'because I can' }),
      ).rejects.toMatchObject(refused);
    }
    expect(await cases()).toEqual(before);
  });

  test('an admin sees documents, who asked and earlier cases', async () => {
    const first = await asked();
    await refuseFabricator(t.db, admin, first, { version: 1, reasons: 'The register extract is cut off.' });
    const second = await asked();
    expect(await verificationQueue(t.db, admin, 'waiting')).toMatchObject([
      { id: second, companyName: 'Fennel Row Coils', country: 'GB' },
    ]);
    expect(await verificationQueue(t.db, admin, 'decided')).toMatchObject([{ id: first }]);
    const found = await verificationCaseFor(t.db, admin, second);
    expect(found).toMatchObject({
      askedBy: owner.name,
      decidedBy: null,
      documents: [{ title: 'Register extract', fileName: 'paper.pdf' }],
      earlier: [{ id: first, state: 'refused' }],
    });
  });
});
