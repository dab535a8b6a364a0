import { createHash } from 'node:crypto';
import { eq, getTableColumns, getTableName, type Table } from 'drizzle-orm';
import { getTableConfig, type SQLiteTable } from 'drizzle-orm/sqlite-core';
import type { Actor } from '../../src/lib/domain/actor.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { invite } from '../../src/lib/server/companies/index.ts';
import type { Database } from '../../src/lib/server/db/index.ts';
import { session } from '../../src/lib/server/db/schema/auth.ts';
import { bid, bidException } from '../../src/lib/server/db/schema/bids.ts';
import { check, heatingRun } from '../../src/lib/server/db/schema/checks.ts';
import { companyAddress, invitation, membership } from '../../src/lib/server/db/schema/companies.ts';
import { file } from '../../src/lib/server/db/schema/files.ts';
import { machine } from '../../src/lib/server/db/schema/machines.ts';
import {
  asBuiltRecord,
  coilOrder,
  drawingRevision,
  milestone,
  orderSpecification,
  piece,
  shipment,
} from '../../src/lib/server/db/schema/orders.ts';
import { dispute } from '../../src/lib/server/db/schema/disputes.ts';
import { job, notification, outboxMail } from '../../src/lib/server/db/schema/platform.ts';
import { question, request, specification } from '../../src/lib/server/db/schema/requests.ts';
import { fabricatorProfile, verificationCase } from '../../src/lib/server/db/schema/verification.ts';
import { drainMails, pathIn } from '../support/mail.ts';
import { aCompany, aMember, anAdmin, aPerson } from '../support/people.ts';

/** Who comes: nobody signed in, and one person of each part in each relation to the objects. */
export const visitors = [
  'visitor',
  'stranger',
  'buyer-owner',
  'buyer-engineer',
  'buyer-purchaser',
  'buyer-technician',
  'maker-owner',
  'maker-estimator',
  'maker-builder',
  'other-buyer',
  'other-maker',
  'unverified-maker',
  'admin',
] as const;
export type Visitor = (typeof visitors)[number];

export interface World {
  actors: Record<Exclude<Visitor, 'visitor'>, Actor>;
  ids: Record<
    | 'buyer'
    | 'maker'
    | 'machine'
    | 'request'
    | 'draft'
    | 'specification'
    | 'bid'
    | 'order'
    | 'milestone'
    | 'piece'
    | 'dispute'
    | 'file'
    | 'question'
    | 'exception'
    | 'address'
    | 'notification'
    | 'mail'
    | 'job'
    | 'invitationToken'
    | 'invitation'
    | 'membership'
    | 'session'
    | 'drawing'
    | 'record'
    | 'shipment'
    | 'verification'
    | 'upload'
    | 'makerFile'
    | 'heating',
    string
  >;
}

interface Defaults {
  user: string;
  company: string;
}

/** Required references to people and companies that a row does not name itself. */
function references(table: SQLiteTable, defaults: Defaults): Record<string, string> {
  const byColumn: Record<string, string> = {};
  for (const key of getTableConfig(table).foreignKeys) {
    const { columns, foreignTable } = key.reference();
    const name = getTableName(foreignTable);
    const value = name === 'user' ? defaults.user : name === 'company' ? defaults.company : undefined;
    if (value && columns[0]) byColumn[columns[0].name] = value;
  }
  return byColumn;
}

/**
 * A row with the given values and, for every other column that must not be empty, the least of its kind.
 * The matrix asks who gets in, not whether the content makes sense.
 */
async function insertLeast<T extends SQLiteTable>(
  db: Database,
  defaults: Defaults,
  table: T,
  values: Record<string, unknown>,
): Promise<void> {
  const row: Record<string, unknown> = { ...values };
  const refers = references(table, defaults);
  for (const [name, column] of Object.entries(getTableColumns(table as Table))) {
    if (name in row || !column.notNull || column.hasDefault) continue;
    if (refers[column.name]) row[name] = refers[column.name];
    else if (column.enumValues && column.enumValues.length > 0) row[name] = column.enumValues[0];
    else if (column.dataType === 'json') row[name] = {};
    else if (column.dataType === 'number') row[name] = 1;
    else if (column.dataType === 'boolean') row[name] = false;
    else if (column.dataType === 'date') row[name] = new Date();
    else row[name] = name === 'id' || column.isUnique || /Key$|Id$/.test(name) ? newId() : 'x';
  }
  await db.insert(table).values(row as T['$inferInsert']);
}

async function people(db: Database, buyer: string, maker: string): Promise<World['actors']> {
  const otherBuyer = await aCompany(db, 'buyer');
  const otherMaker = await aCompany(db, 'fabricator', { verified: true });
  const unverified = await aCompany(db, 'fabricator');
  return {
    stranger: await aPerson(db),
    'buyer-owner': await aMember(db, buyer, ['owner']),
    'buyer-engineer': await aMember(db, buyer, ['engineer']),
    'buyer-purchaser': await aMember(db, buyer, ['purchaser']),
    'buyer-technician': await aMember(db, buyer, ['technician']),
    'maker-owner': await aMember(db, maker, ['owner']),
    'maker-estimator': await aMember(db, maker, ['estimator']),
    'maker-builder': await aMember(db, maker, ['builder']),
    // Every role of a company that has nothing to do with it.
    'other-buyer': await aMember(db, otherBuyer, ['owner', 'engineer', 'purchaser', 'technician']),
    'other-maker': await aMember(db, otherMaker, ['owner', 'estimator', 'builder']),
    'unverified-maker': await aMember(db, unverified, ['owner', 'estimator', 'builder']),
    admin: await anAdmin(db),
  };
}

/** A buyer with a request, a bid on it, and an order with the same maker. */
export async function buildWorld(db: Database): Promise<World> {
  const buyer = await aCompany(db, 'buyer', { name: 'Millrace Driveline' });
  const maker = await aCompany(db, 'fabricator', { name: 'Copperfold Works', verified: true });
  const actors = await people(db, buyer, maker);
  const by = actors['buyer-owner'].userId;
  const id = Object.fromEntries(
    [
      'machine',
      'request',
      'draft',
      'specification',
      'bid',
      'order',
      'milestone',
      'piece',
      'dispute',
      'file',
      'question',
      'exception',
      'address',
      'notification',
      'mail',
      'job',
      'check',
      'drawing',
      'record',
      'shipment',
      'verification',
      'upload',
      'makerFile',
      'heating',
    ].map((name) => [name, newId()]),
  ) as Record<string, string>;
  const put = <T extends SQLiteTable>(table: T, values: Record<string, unknown>) =>
    insertLeast(db, { user: by, company: buyer }, table, values);
  const now = Date.now();

  await put(heatingRun, {
    id: id['heating'],
    jobId: id['job'],
    userId: actors['buyer-engineer'].userId,
    expiresAt: Date.now() + 86_400_000,
  });
  await put(machine, { id: id['machine'], companyId: buyer, createdBy: by });
  await put(request, { id: id['draft'], companyId: buyer, number: 1001, state: 'draft', createdBy: by });
  await put(request, {
    id: id['request'],
    companyId: buyer,
    number: 1002,
    state: 'posted',
    createdBy: by,
    currentSpecificationId: id['specification'],
    commercial: { invited: [], open: true, milestoneLimits: {}, quantity: 1 },
    postedAt: now,
    closesAt: now + 86_400_000,
  });
  await put(check, { id: id['check'], companyId: buyer, requestId: id['request'], state: 'done' });
  await put(specification, {
    id: id['specification'],
    requestId: id['request'],
    checkId: id['check'],
    number: 1,
    createdBy: by,
  });
  await put(question, {
    id: id['question'],
    requestId: id['request'],
    companyId: maker,
    askedBy: actors['maker-owner'].userId,
  });
  await put(bid, {
    id: id['bid'],
    requestId: id['request'],
    companyId: maker,
    state: 'submitted',
    specificationId: id['specification'],
    createdBy: actors['maker-owner'].userId,
  });
  await put(bidException, { id: id['exception'], bidId: id['bid'] });
  await put(coilOrder, {
    id: id['order'],
    number: 1003,
    requestId: id['request'],
    bidId: id['bid'],
    specificationId: id['specification'],
    buyerCompanyId: buyer,
    fabricatorCompanyId: maker,
    state: 'running',
    buyerZone: 'UTC',
    nextCheckAt: now + 86_400_000,
  });
  await put(milestone, {
    id: id['milestone'],
    orderId: id['order'],
    kind: 'build',
    work: 'open',
    money: 'held',
    amount: 1000,
    feeBase: 1000,
  });
  for (const [position, kind] of (['drawing', 'delivery'] as const).entries()) {
    await put(milestone, { orderId: id['order'], position: position + 5, kind, work: 'open', money: 'held' });
  }
  await put(piece, { id: id['piece'], orderId: id['order'] });
  await put(orderSpecification, { orderId: id['order'], number: 1, body: '{}' });
  await put(drawingRevision, {
    id: id['drawing'],
    orderId: id['order'],
    state: 'submitted',
    fileId: id['file'],
  });
  await put(asBuiltRecord, {
    id: id['record'],
    orderId: id['order'],
    pieceId: id['piece'],
    attempt: 1,
    verdicts: [],
  });
  await put(shipment, { id: id['shipment'], orderId: id['order'], shippedOn: '2026-12-01' });
  await put(dispute, {
    id: id['dispute'],
    orderId: id['order'],
    milestoneId: id['milestone'],
    openedBy: by,
    openedByCompanyId: buyer,
  });
  await put(file, {
    id: id['file'],
    ownerCompanyId: buyer,
    uploadedBy: by,
    state: 'clean',
    purpose: 'company-document',
    storageKey: newId(),
    sha256: 'x',
  });
  await put(file, {
    id: id['upload'],
    ownerCompanyId: buyer,
    uploadedBy: by,
    state: 'pending',
    purpose: 'company-document',
  });
  await put(file, {
    id: id['makerFile'],
    ownerCompanyId: maker,
    uploadedBy: actors['maker-owner'].userId,
    state: 'clean',
    purpose: 'coil-drawing',
    storageKey: newId(),
    sha256: 'x',
  });
  await put(verificationCase, {
    id: id['verification'],
    companyId: maker,
    askedBy: actors['maker-owner'].userId,
  });
  await put(fabricatorProfile, { companyId: maker });
  await put(companyAddress, { id: id['address'], companyId: buyer });
  await put(notification, { id: id['notification'], userId: by, href: '/desk' });
  await put(outboxMail, { id: id['mail'], state: 'dead', body: '{"heading":"h","paragraphs":[]}' });
  await put(job, { id: id['job'], state: 'dead' });
  for (const actor of Object.values(actors)) {
    await put(session, { userId: actor.userId, token: newId(), id: `session-${actor.userId}` });
  }
  await invite(db, actors['buyer-owner'], {
    companyId: buyer,
    email: actors.stranger.email,
    roles: ['engineer'],
  });
  const mail = (await drainMails(db)).find((m) => m.to === actors.stranger.email);
  const [invited] = await db.select().from(invitation);
  const [technician] = await db
    .select()
    .from(membership)
    .where(eq(membership.userId, actors['buyer-technician'].userId));
  Object.assign(id, {
    invitation: invited?.id,
    membership: technician?.id,
    session: `session-${actors['buyer-owner'].userId}`,
  });
  return {
    actors,
    ids: {
      ...id,
      buyer,
      maker,
      invitationToken: pathIn(mail).pathname.replace('/invitations/', ''),
    } as World['ids'],
  };
}

/** What counts as changed: every row of every table but the bookkeeping that a mere visit moves. */
export async function fingerprint(db: Database): Promise<Record<string, string>> {
  const skipped = new Set(['rate_limit', 'service_probe', 'session', 'verification']);
  const tables = await db.$client.execute(
    `select name from sqlite_master where type = 'table' and name not like 'sqlite_%' and name not like '%\\_fts%' escape '\\'`,
  );
  const result: Record<string, string> = {};
  for (const { name } of tables.rows) {
    const table = String(name);
    if (skipped.has(table)) continue;
    const rows = await db.$client.execute(`select * from "${table}" order by 1`);
    result[table] = createHash('sha256').update(JSON.stringify(rows.rows)).digest('hex');
  }
  return result;
}
