import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { invitationMachine } from '../../../src/lib/domain/invitation.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import { invitation } from '../../../src/lib/server/db/schema/companies.ts';
import { auditEvent, outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { transition } from '../../../src/lib/server/db/transition.ts';
import { enqueueMail } from '../../../src/lib/server/outbox/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aCompany, aMember } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let t: TestDatabase;
let by: Actor;
let id: string;

beforeEach(async () => {
  t = await testDatabase();
  const companyId = await aCompany(t.db, 'buyer');
  by = await aMember(t.db, companyId, ['owner']);
  id = newId();
  await t.db.insert(invitation).values({
    id,
    companyId,
    email: 'a@works.example',
    roles: ['engineer'],
    tokenHash: id,
    expiresAt: 1,
    invitedBy: by.userId,
    createdAt: 0,
  });
});
afterEach(() => t.close());

const act = (event: 'accept' | 'withdraw', extra: { expectedVersion?: number; fail?: boolean } = {}) =>
  transact(t.db, async (tx) => {
    const [row] = await tx.select().from(invitation).where(eq(invitation.id, id));
    if (!row) throw new Error('no row');
    const to = await transition(tx, {
      machine: invitationMachine,
      table: invitation,
      column: invitation.state,
      columnName: 'state',
      id,
      from: row.state,
      event,
      by,
      ...(extra.expectedVersion === undefined ? {} : { expectedVersion: extra.expectedVersion }),
    });
    await enqueueMail(tx, {
      kind: 'test',
      to: { userId: null, email: 'a@works.example' },
      subject: 's',
      content: { heading: 'h', paragraphs: [] },
      about: { type: 'invitation', id },
    });
    if (extra.fail) throw new Error('on purpose');
    return to;
  });

const everything = async () => [
  await t.db.select().from(invitation),
  await t.db.select().from(auditEvent),
  await t.db.select().from(outboxMail),
];

test('state, version, audit row and mail are written together', async () => {
  expect(await act('accept')).toBe('accepted');
  const [rows, events, mails] = await everything();
  expect(rows).toMatchObject([{ state: 'accepted', version: 2 }]);
  expect(events).toMatchObject([
    { action: 'invitation.accept', actorUserId: by.userId, detail: { from: 'open', to: 'accepted' } },
  ]);
  expect(mails).toHaveLength(1);
});

test('when anything of it fails nothing is written', async () => {
  const before = await everything();
  await expect(act('accept', { fail: true })).rejects.toThrow('on purpose');
  expect(await everything()).toEqual(before);
});

test('an event that the state does not allow, or a version that is not the present one, is a conflict', async () => {
  expect(await refusalCode(act('accept', { expectedVersion: 7 }))).toBe('version-conflict');
  await act('withdraw');
  const before = await everything();
  const late = await refusal(act('accept'));
  expect(late.code).toBe('state-conflict');
  expect(late.message).toContain('withdrawn');
  expect(await everything()).toEqual(before);
});

test('of two opposite acts at one moment exactly one wins', async () => {
  const results = await Promise.allSettled([act('accept'), act('withdraw'), act('accept')]);
  expect(results.filter((r) => r.status === 'fulfilled')).toHaveLength(1);
  const [, events, mails] = await everything();
  expect(events).toHaveLength(1);
  expect(mails).toHaveLength(1);
});

test('audit rows cannot be changed or deleted', async () => {
  await act('accept');
  await expect(t.db.update(auditEvent).set({ action: 'other' }).run()).rejects.toThrow();
  await expect(t.db.delete(auditEvent).run()).rejects.toThrow();
  expect((await t.db.select().from(auditEvent))[0]?.action).toBe('invitation.accept');
});
