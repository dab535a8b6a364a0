import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import {
  adminOverview,
  checkAuditTrail,
  handleJob,
  handleMail,
  listAuditTrail,
  listJobs,
  listMails,
  listUsers,
  mailFor,
  probeServices,
  trailFilterChoices,
} from '../../../src/lib/server/admin/index.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { audit } from '../../../src/lib/server/audit/index.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import { auditEvent, job, outboxMail, serviceProbe } from '../../../src/lib/server/db/schema/platform.ts';
import { enqueueMail, sendDueMails } from '../../../src/lib/server/outbox/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { drainMails } from '../../support/mail.ts';
import { aCompany, aMember, anAdmin, aPerson } from '../../support/people.ts';

let t: TestDatabase;
let admin: Actor;
let owner: Actor;
let companyId: string;

beforeEach(async () => {
  t = await testDatabase();
  admin = await anAdmin(t.db);
  companyId = await aCompany(t.db, 'buyer', { name: 'Anvil Row Hardening' });
  owner = await aMember(t.db, companyId, ['owner'], { name: 'Anvil owner', email: 'owner@anvil.example' });
});
afterEach(() => t.close());

const token = 'single-use-token-0123456789';

async function aMail(secret = false): Promise<string> {
  await enqueueMail(t.db, {
    kind: secret ? 'reset-password' : 'bid-received',
    to: { userId: owner.userId, email: owner.email },
    subject: 'Subject',
    content: { heading: 'Heading', paragraphs: [secret ? token : 'A bid came in.'] },
    about: { type: 'user', id: owner.userId },
    secret,
  });
  const rows = await t.db.select({ id: outboxMail.id }).from(outboxMail).orderBy(outboxMail.id);
  return rows.at(-1)?.id ?? '';
}

async function aJob(state: 'queued' | 'dead' | 'running' | 'done'): Promise<string> {
  const id = newId();
  await t.db.insert(job).values({
    id,
    kind: 'test-job',
    payload: {},
    state,
    attempts: 5,
    runAt: 1,
    createdAt: 1,
    lastError: 'E',
  });
  return id;
}

const stateOfMail = async (id: string) =>
  (await t.db.select().from(outboxMail).where(eq(outboxMail.id, id)))[0]?.state;
const stateOfJob = async (id: string) => (await t.db.select().from(job).where(eq(job.id, id)))[0]?.state;
const actions = async () =>
  (await t.db.select({ action: auditEvent.action }).from(auditEvent)).map((row) => row.action);

describe('only admins', () => {
  test('see or do anything here; for others there is nothing, and nothing changes', async () => {
    const mailId = await aMail();
    const jobId = await aJob('dead');
    const all = { state: null, about: null, after: null };
    const trail = { subjectType: null, subjectId: null, companyId: null, after: null };
    for (const who of [owner, await aPerson(t.db)]) {
      for (const attempt of [
        () => adminOverview(t.db, who),
        () => listMails(t.db, who, all),
        () => mailFor(t.db, who, mailId),
        () => handleMail(t.db, who, mailId, 'park'),
        () => listJobs(t.db, who, { state: null, after: null }),
        () => handleJob(t.db, who, jobId, 'retry'),
        () => listUsers(t.db, who, { q: '', after: null }),
        () => listAuditTrail(t.db, who, trail),
        () => trailFilterChoices(t.db, who),
        () => checkAuditTrail(t.db, who),
      ]) {
        await expect(attempt()).rejects.toMatchObject({ code: 'not-found' });
      }
    }
    expect([await stateOfMail(mailId), await stateOfJob(jobId)]).toEqual(['queued', 'dead']);
    expect(await actions()).toEqual([]);
  });
});

describe('outbox', () => {
  test('a secret body is shown nowhere, a plain one only on its own page', async () => {
    const secret = await aMail(true);
    const plain = await aMail();
    const list = await listMails(t.db, admin, { state: 'queued', about: owner.userId, after: null });
    expect(list.items.map((item) => item.id)).toEqual([plain, secret]);
    const shown = JSON.stringify([list, await mailFor(t.db, admin, secret)]);
    expect(shown).not.toContain(token);
    expect(shown).not.toContain('"body"');
    const [row] = await t.db.select().from(outboxMail).where(eq(outboxMail.id, secret));
    expect(shown).not.toContain(row?.body);
    expect((await mailFor(t.db, admin, secret)).text).toBeNull();
    expect((await mailFor(t.db, admin, plain)).text).toContain('A bid came in.');
  });

  test('a parked mail waits, and goes out once it is tried again', async () => {
    const id = await aMail();
    await handleMail(t.db, admin, id, 'park');
    expect(await drainMails(t.db)).toEqual([]);
    await expect(handleMail(t.db, admin, id, 'park')).rejects.toMatchObject({ code: 'state-conflict' });
    await handleMail(t.db, admin, id, 'retry');
    expect(await drainMails(t.db)).toMatchObject([{ messageId: id, to: owner.email }]);
    await expect(handleMail(t.db, admin, id, 'retry')).rejects.toMatchObject({ code: 'state-conflict' });
    expect(await actions()).toEqual(['mail.park', 'mail.retry']);
  });

  test('a dead mail gets all its tries again', async () => {
    const id = await aMail();
    await t.db.update(outboxMail).set({ attempts: 15 }).where(eq(outboxMail.id, id));
    const down = () => Promise.reject(new Error('no server'));
    await sendDueMails(t.db, down, { owner: 'test' });
    expect(await stateOfMail(id)).toBe('dead');
    await handleMail(t.db, admin, id, 'retry');
    const [row] = await t.db.select().from(outboxMail).where(eq(outboxMail.id, id));
    expect(row).toMatchObject({ state: 'queued', attempts: 0 });
    expect(await drainMails(t.db)).toHaveLength(1);
  });
});

describe('jobs', () => {
  test('dead ones run again or are parked; running and done ones are left alone', async () => {
    const [dead, queued, running, done] = [
      await aJob('dead'),
      await aJob('queued'),
      await aJob('running'),
      await aJob('done'),
    ];
    await handleJob(t.db, admin, dead, 'retry');
    await handleJob(t.db, admin, queued, 'park');
    for (const id of [running, done]) {
      for (const event of ['retry', 'park'] as const) {
        await expect(handleJob(t.db, admin, id, event)).rejects.toMatchObject({ code: 'state-conflict' });
      }
    }
    expect(await Promise.all([dead, queued, running, done].map(stateOfJob))).toEqual([
      'queued',
      'parked',
      'running',
      'done',
    ]);
    expect((await listJobs(t.db, admin, { state: 'parked', after: null })).items).toMatchObject([
      { id: queued },
    ]);
    await expect(handleJob(t.db, admin, newId(), 'retry')).rejects.toMatchObject({ code: 'not-found' });
  });
});

describe('people', () => {
  test('are listed with their companies and found by a part of name or address; nothing secret with them', async () => {
    const { items } = await listUsers(t.db, admin, { q: 'ANVIL', after: null });
    expect(items).toMatchObject([
      { email: 'owner@anvil.example', companies: [{ companyName: 'Anvil Row Hardening', roles: ['owner'] }] },
    ]);
    expect(JSON.stringify(items)).not.toMatch(/password|secret|token/i);
    expect((await listUsers(t.db, admin, { q: '_', after: null })).items).toEqual([]);
  });

  test('come in pages by address', async () => {
    for (let n = 0; n < 60; n += 1) await aPerson(t.db);
    const first = await listUsers(t.db, admin, { q: '', after: null });
    const second = await listUsers(t.db, admin, { q: '', after: first.next });
    const ids = [...first.items, ...second.items].map((item) => item.id);
    expect(first.items).toHaveLength(50);
    expect(new Set(ids).size).toBe(ids.length);
    expect(second.next).toBeNull();
  });
});

describe('audit trail', () => {
  async function write(subjectType: string, count: number, of: string | null) {
    await transact(t.db, async (tx) => {
      for (let n = 0; n < count; n += 1) {
        await audit(tx, owner, { action: 'x', subjectType, subjectId: `${n}`, companyId: of });
      }
    });
  }

  test('is filtered by subject and company and comes in pages', async () => {
    await write('order', 60, companyId);
    await write('request', 2, null);
    const none = { subjectType: null, subjectId: null, companyId: null, after: null };
    const first = await listAuditTrail(t.db, admin, { ...none, companyId });
    const second = await listAuditTrail(t.db, admin, { ...none, companyId, after: first.next });
    expect([first.items.length, second.items.length, second.next]).toEqual([50, 10, null]);
    expect(first.items[0]).toMatchObject({
      actorName: 'Anvil owner',
      companyName: 'Anvil Row Hardening',
      subjectId: '59',
      sealed: false,
    });
    expect((await listAuditTrail(t.db, admin, { ...none, subjectType: 'request' })).items).toHaveLength(2);
    expect(
      (await listAuditTrail(t.db, admin, { ...none, subjectType: 'order', subjectId: '7' })).items,
    ).toHaveLength(1);
    expect((await trailFilterChoices(t.db, admin)).subjectTypes).toEqual(['order', 'request']);
  });
});

describe('services', () => {
  test('each answer is kept, a service that is down is a row and keeps nothing else from being asked', async () => {
    const down = () => Promise.reject(new Error('connect ECONNREFUSED'));
    await probeServices(t.db, [
      { name: 'mail', ask: down },
      { name: 'storage', ask: () => Promise.resolve('The object store answers.') },
    ]);
    expect((await adminOverview(t.db, admin)).probes).toMatchObject([
      { name: 'mail', ok: false, detail: 'connect ECONNREFUSED', stale: false },
      { name: 'storage', ok: true, stale: false },
    ]);
  });

  test('are not asked again within seconds, and an answer of long ago is called stale', async () => {
    let asked = 0;
    const probes = [{ name: 'mail', ask: () => Promise.resolve(`answer ${(asked += 1)}`) }];
    await probeServices(t.db, probes);
    await probeServices(t.db, probes);
    expect(asked).toBe(1);
    await t.db.update(serviceProbe).set({ at: Date.now() - 200_000 });
    expect((await adminOverview(t.db, admin)).probes[0]?.stale).toBe(true);
    await probeServices(t.db, probes);
    expect(asked).toBe(2);
  });
});

test('the overview counts what waits', async () => {
  await aMail();
  await aJob('dead');
  await aCompany(t.db, 'fabricator', { verified: true });
  await aCompany(t.db, 'fabricator');
  expect(await adminOverview(t.db, admin)).toMatchObject({
    waitingVerifications: 0,
    openDisputes: 0,
    verifiedFabricators: 1,
    mails: { queued: 1, sent: 0 },
    jobs: { dead: 1, queued: 0 },
  });
});
