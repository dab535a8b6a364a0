import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { listAuditTrail, listJobs, listMails, listUsers } from '../../../src/lib/server/admin/index.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import type { Database } from '../../../src/lib/server/db/index.ts';
import { unsafeCurrentDocuments } from '../../../src/lib/server/files/index.ts';
import { listNotifications, unreadCount } from '../../../src/lib/server/notifications/index.ts';
import { verificationQueue } from '../../../src/lib/server/verification/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { anAdmin } from '../../support/people.ts';
import { plansOf, slowSteps } from '../../support/query-plans.ts';

let t: TestDatabase;
let admin: Actor;

beforeEach(async () => {
  t = await testDatabase();
  admin = await anAdmin(t.db);
});
afterEach(() => t.close());

const id = newId();
const trail = { subjectType: null, subjectId: null, companyId: null, after: null };

const lists: [string, (db: Database) => Promise<unknown>][] = [
  ['notifications', (db) => listNotifications(db, admin, { after: `5.${id}` })],
  ['unread count', (db) => unreadCount(db, admin)],
  ['mails', (db) => listMails(db, admin, { state: null, about: null, after: id })],
  ['mails by state', (db) => listMails(db, admin, { state: 'sent', about: null, after: id })],
  ['mails about something', (db) => listMails(db, admin, { state: null, about: id, after: null })],
  ['jobs by state', (db) => listJobs(db, admin, { state: 'done', after: id })],
  ['people', (db) => listUsers(db, admin, { q: '', after: 'a@b.example' })],
  ['trail', (db) => listAuditTrail(db, admin, { ...trail, after: id })],
  ['trail by company', (db) => listAuditTrail(db, admin, { ...trail, companyId: id, after: id })],
  ['trail by kind', (db) => listAuditTrail(db, admin, { ...trail, subjectType: 'order' })],
  [
    'trail by subject',
    (db) => listAuditTrail(db, admin, { ...trail, subjectType: 'order', subjectId: id, after: id }),
  ],
  ['cases that wait', (db) => verificationQueue(db, admin, 'waiting')],
];

test.each(lists)('%s: found and ordered by an index', async (_name, work) => {
  const plans = await plansOf(t.file, work);
  expect(plans.length).toBeGreaterThan(0);
  // `unread` is the hundred rows at most that are counted.
  expect(slowSteps(plans, ['unread']), JSON.stringify(plans)).toEqual([]);
});

test('documents of a company are found by an index; the few are sorted', async () => {
  const plans = await plansOf(t.file, (db) => unsafeCurrentDocuments(db, id));
  expect(plans.flat().filter((step) => step.startsWith('SCAN'))).toEqual([]);
});

test('a whole table read or sorted would be seen', async () => {
  const plans = await plansOf(t.file, (db) => db.run('select * from user order by name'));
  expect(slowSteps(plans)).toHaveLength(2);
});
