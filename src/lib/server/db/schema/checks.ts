import { index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { user } from './auth.ts';
import { id, instant } from './columns.ts';
import { company } from './companies.ts';

/**
 * One run of the checker over a requirement. Knows the requirement, not the request: the request's id
 * and version are carried as facts. (The SQL name avoids the keyword CHECK.)
 */
export const check = sqliteTable(
  'requirement_check',
  {
    id: id(),
    companyId: text('company_id').references(() => company.id, { onDelete: 'restrict' }),
    requestId: text('request_id'),
    /** Version of the draft that the requirement was taken from. */
    requestVersion: integer('request_version'),
    /** SHA-256 of the canonical JSON (RFC 8785) of the requirement. */
    requirementHash: text('requirement_hash').notNull(),
    /** The canonical JSON itself. */
    requirement: text('requirement').notNull(),
    methodVersion: text('method_version').notNull(),
    setting: text('setting', { enum: ['preview', 'default', 'fine'] }).notNull(),
    state: text('state', { enum: ['done', 'failed'] }).notNull(),
    blockers: integer('blockers').notNull().default(0),
    cautions: integer('cautions').notNull().default(0),
    notes: integer('notes').notNull().default(0),
    createdAt: instant('created_at').notNull(),
    createdBy: text('created_by').references(() => user.id, { onDelete: 'restrict' }),
  },
  (table) => [
    index('check_request').on(table.requestId, table.requestVersion),
    index('check_key').on(table.requirementHash, table.setting, table.methodVersion),
  ],
);

/** Figures and findings of a check, apart, so that lists never read them. At most 256 kB. */
export const checkResult = sqliteTable('check_result', {
  checkId: text('check_id')
    .primaryKey()
    .references(() => check.id, { onDelete: 'restrict' }),
  body: text('body').notNull(),
});

/** A caution seen, or a blocker carried, by name; belongs to one finding of one check. */
export const checkAcknowledgement = sqliteTable(
  'check_acknowledgement',
  {
    id: id(),
    checkId: text('check_id')
      .notNull()
      .references(() => check.id, { onDelete: 'restrict' }),
    code: text('code').notNull(),
    subject: text('subject').notNull(),
    kind: text('kind', { enum: ['acknowledged', 'carried'] }).notNull(),
    /** Who stands for it, as shown to bidders where it is carried. */
    name: text('name').notNull(),
    reason: text('reason').notNull().default(''),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    at: instant('at').notNull(),
  },
  (table) => [uniqueIndex('check_acknowledgement_finding').on(table.checkId, table.code, table.subject)],
);

/** A heating run asked for by API; its job carries state and progress. Kept for a day. */
export const heatingRun = sqliteTable(
  'heating_run',
  {
    id: id(),
    jobId: text('job_id').notNull(),
    /** null: asked without an account; whoever has the id may read it. */
    userId: text('user_id').references(() => user.id, { onDelete: 'restrict' }),
    request: text('request').notNull(),
    methodVersion: text('method_version').notNull(),
    result: text('result'),
    /** Why it gives no result, in words. */
    problem: text('problem'),
    createdAt: instant('created_at').notNull(),
    /** Real time. */
    expiresAt: instant('expires_at').notNull(),
  },
  (table) => [index('heating_run_expires').on(table.expiresAt)],
);
