import { index, integer, primaryKey, real, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import type { Commercial } from '../../../domain/commercial.ts';
import { requestStates } from '../../../domain/request-states.ts';
import type { Requirement } from '../../../induction/check/types.ts';
import { user } from './auth.ts';
import { check } from './checks.ts';
import { id, instant, json, version } from './columns.ts';
import { company } from './companies.ts';
import { machine } from './machines.ts';

/** What was typed, by field path, in the unit set it was typed in; nothing half entered is lost. */
export interface DraftForm {
  unitSet: 'metric' | 'inch';
  values: Record<string, string>;
}

export const request = sqliteTable(
  'request',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    /** Shown as R-1042; per company. */
    number: integer('number').notNull(),
    title: text('title').notNull(),
    state: text('state', { enum: requestStates }).notNull().default('draft'),
    form: json<DraftForm>('form').notNull(),
    /** null while the draft does not read as a whole requirement. */
    requirement: json<Requirement>('requirement'),
    commercial: json<Commercial>('commercial'),
    machineId: text('machine_id').references(() => machine.id, { onDelete: 'restrict' }),
    machineVersion: integer('machine_version'),
    currentSpecificationId: text('current_specification_id'),
    /** What the board filters by; set when posted. */
    shape: text('shape'),
    tubeSize: real('tube_size'),
    material: text('material'),
    quantity: integer('quantity'),
    closesAt: instant('closes_at'),
    postedAt: instant('posted_at'),
    closedAt: instant('closed_at'),
    closeReminderAt: instant('close_reminder_at'),
    /** IANA zone of the buyer when posted: windows and closing are told in it. */
    buyerZone: text('buyer_zone'),
    withdrawReason: text('withdraw_reason').notNull().default(''),
    createdAt: instant('created_at').notNull(),
    updatedAt: instant('updated_at').notNull(),
    createdBy: text('created_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('request_company_number').on(table.companyId, table.number),
    index('request_company_state').on(table.companyId, table.state, table.updatedAt),
    index('request_state_closes').on(table.state, table.closesAt, table.id),
  ],
);

/** Immutable (triggers forbid changes): the exact bytes of `body` are what `hash` is of. */
export const specification = sqliteTable(
  'specification',
  {
    id: id(),
    requestId: text('request_id')
      .notNull()
      .references(() => request.id, { onDelete: 'restrict' }),
    number: integer('number').notNull(),
    body: text('body').notNull(),
    /** SHA-256 hex of the bytes of `body`. */
    hash: text('hash').notNull(),
    checkId: text('check_id')
      .notNull()
      .references(() => check.id, { onDelete: 'restrict' }),
    createdAt: instant('created_at').notNull(),
    createdBy: text('created_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
  },
  (table) => [uniqueIndex('specification_number').on(table.requestId, table.number)],
);

export const question = sqliteTable(
  'question',
  {
    id: id(),
    requestId: text('request_id')
      .notNull()
      .references(() => request.id, { onDelete: 'restrict' }),
    /** The asker's company; never shown to other bidders. */
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    kind: text('kind', { enum: ['clarification', 'proposal'] }).notNull(),
    text: text('text').notNull(),
    askedBy: text('asked_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    askedAt: instant('asked_at').notNull(),
    answer: text('answer'),
    answeredBy: text('answered_by').references(() => user.id, { onDelete: 'restrict' }),
    answeredAt: instant('answered_at'),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [index('question_request').on(table.requestId, table.askedAt)],
);

export const requestFile = sqliteTable(
  'request_file',
  {
    requestId: text('request_id')
      .notNull()
      .references(() => request.id, { onDelete: 'restrict' }),
    fileId: text('file_id').notNull(),
    kind: text('kind', { enum: ['request-sketch', 'part-drawing'] }).notNull(),
    addedAt: instant('added_at').notNull(),
  },
  (table) => [primaryKey({ columns: [table.requestId, table.fileId] })],
);
