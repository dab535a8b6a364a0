import { sql } from 'drizzle-orm';
import { index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { user } from './auth.ts';
import { flag, id, instant, json } from './columns.ts';

export const setting = sqliteTable('setting', {
  key: text('key').primaryKey(),
  value: text('value').notNull(),
});

export const auditEvent = sqliteTable(
  'audit_event',
  {
    id: id(),
    /** Business time. */
    at: instant('at').notNull(),
    actorKind: text('actor_kind', { enum: ['user', 'admin', 'system'] }).notNull(),
    actorUserId: text('actor_user_id'),
    companyId: text('company_id'),
    action: text('action').notNull(),
    subjectType: text('subject_type').notNull(),
    subjectId: text('subject_id').notNull(),
    detail: json<Record<string, unknown>>('detail').notNull(),
    requestId: text('request_id'),
    /** Chained hash, set when the batch is sealed. */
    seal: text('seal'),
  },
  (table) => [
    // Ids are in the order of time, so lists go by them.
    index('audit_subject').on(table.subjectType, table.subjectId, table.id),
    index('audit_type').on(table.subjectType, table.id),
    index('audit_company').on(table.companyId, table.id),
    index('audit_seal_rows').on(table.seal, table.id),
    index('audit_unsealed')
      .on(table.id)
      .where(sql`${table.seal} is null`),
  ],
);

/** A mail to be sent. Written in the transaction of the event it tells about. */
export const outboxMail = sqliteTable(
  'outbox_mail',
  {
    id: id(),
    kind: text('kind').notNull(),
    toUserId: text('to_user_id').references(() => user.id, { onDelete: 'restrict' }),
    toEmail: text('to_email').notNull(),
    subject: text('subject').notNull(),
    /** Content as JSON; encrypted where it carries a token, emptied after sending. */
    body: text('body').notNull(),
    secret: flag('secret').notNull().default(false),
    state: text('state', { enum: ['queued', 'sending', 'sent', 'dead', 'parked'] })
      .notNull()
      .default('queued'),
    attempts: integer('attempts').notNull().default(0),
    /** Real time, as are leases. */
    runAt: instant('run_at').notNull(),
    leaseOwner: text('lease_owner'),
    leaseUntil: instant('lease_until'),
    lastError: text('last_error'),
    dedupeKey: text('dedupe_key').unique(),
    /** What it is about, so that a mail can be traced from its event. */
    subjectType: text('subject_type').notNull(),
    subjectId: text('subject_id').notNull(),
    createdAt: instant('created_at').notNull(),
    sentAt: instant('sent_at'),
  },
  (table) => [
    index('outbox_due').on(table.state, table.runAt),
    index('outbox_subject').on(table.subjectType, table.subjectId),
    index('outbox_about').on(table.subjectId, table.id),
    index('outbox_list').on(table.state, table.id),
  ],
);

export const notification = sqliteTable(
  'notification',
  {
    id: id(),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    kind: text('kind').notNull(),
    title: text('title').notNull(),
    /** Own path of the page it is about. */
    href: text('href').notNull(),
    at: instant('at').notNull(),
    readAt: instant('read_at'),
  },
  (table) => [
    index('notification_user').on(table.userId, table.readAt, table.at),
    index('notification_list').on(table.userId, table.at, table.id),
  ],
);

export const job = sqliteTable(
  'job',
  {
    id: id(),
    kind: text('kind').notNull(),
    payload: json<unknown>('payload').notNull(),
    state: text('state', { enum: ['queued', 'running', 'done', 'dead', 'cancelled', 'parked'] })
      .notNull()
      .default('queued'),
    attempts: integer('attempts').notNull().default(0),
    runAt: instant('run_at').notNull(),
    leaseOwner: text('lease_owner'),
    leaseUntil: instant('lease_until'),
    lastError: text('last_error'),
    dedupeKey: text('dedupe_key'),
    /** 0 to 1, written at most twice a second. */
    progress: integer('progress_ppm').notNull().default(0),
    createdAt: instant('created_at').notNull(),
    finishedAt: instant('finished_at'),
  },
  (table) => [
    index('job_due').on(table.state, table.runAt),
    index('job_list').on(table.state, table.id),
    uniqueIndex('job_dedupe').on(table.kind, table.dedupeKey),
  ],
);

/** Sliding counts for limits per account, address and purpose. */
export const rateLimit = sqliteTable('rate_limit', {
  key: text('key').primaryKey(),
  count: integer('count').notNull(),
  windowEndsAt: instant('window_ends_at').notNull(),
});

export const serviceProbe = sqliteTable('service_probe', {
  name: text('name').primaryKey(),
  ok: flag('ok').notNull(),
  detail: text('detail').notNull(),
  at: instant('at').notNull(),
});
