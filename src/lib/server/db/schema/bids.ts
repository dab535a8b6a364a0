import { index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { approvalStates, bidStates, exceptionStates, type BidBody } from '../../../domain/bid.ts';
import { user } from './auth.ts';
import { flag, id, instant, json, version } from './columns.ts';
import { company } from './companies.ts';
import { file } from './files.ts';
import { request, specification } from './requests.ts';

export const bid = sqliteTable(
  'bid',
  {
    id: id(),
    requestId: text('request_id')
      .notNull()
      .references(() => request.id, { onDelete: 'restrict' }),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    number: integer('number').notNull(),
    state: text('state', { enum: bidStates }).notNull().default('draft'),
    /** The specification that the figures of this bid refer to. */
    specificationId: text('specification_id')
      .notNull()
      .references(() => specification.id, { onDelete: 'restrict' }),
    currency: text('currency', { enum: ['EUR', 'USD', 'GBP'] }).notNull(),
    body: json<BidBody>('body').notNull(),
    netAmount: integer('net_amount').notNull(),
    taxAmount: integer('tax_amount').notNull(),
    freightAmount: integer('freight_amount').notNull(),
    totalAmount: integer('total_amount').notNull(),
    leadTimeWorkingDays: integer('lead_time_working_days').notNull(),
    /** Date (YYYY-MM-DD) to the end of which it holds, in the buyer's zone. */
    validUntil: text('valid_until').notNull(),
    submittedAt: instant('submitted_at'),
    submittedBy: text('submitted_by').references(() => user.id, { onDelete: 'restrict' }),
    createdBy: text('created_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    createdAt: instant('created_at').notNull(),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('bid_request_company').on(table.requestId, table.companyId),
    index('bid_company').on(table.companyId, table.state),
    index('bid_validity').on(table.state, table.validUntil),
  ],
);

/** A stated departure from the specification. */
export const bidException = sqliteTable(
  'bid_exception',
  {
    id: id(),
    bidId: text('bid_id')
      .notNull()
      .references(() => bid.id, { onDelete: 'restrict' }),
    /** Which line of the specification: a field path or a heading in words. */
    subject: text('subject').notNull(),
    text: text('text').notNull(),
    position: integer('position').notNull(),
    state: text('state', { enum: exceptionStates }).notNull().default('open'),
    decidedBy: text('decided_by').references(() => user.id, { onDelete: 'restrict' }),
    decidedAt: instant('decided_at'),
    reason: text('reason').notNull().default(''),
    /** A refusal stands only once the bidder has confirmed the bid without it. */
    refusalConfirmed: flag('refusal_confirmed').notNull().default(false),
    version: version(),
  },
  (table) => [index('bid_exception_bid').on(table.bidId)],
);

export const bidFile = sqliteTable(
  'bid_file',
  {
    id: id(),
    bidId: text('bid_id')
      .notNull()
      .references(() => bid.id, { onDelete: 'restrict' }),
    fileId: text('file_id')
      .notNull()
      .references(() => file.id, { onDelete: 'restrict' }),
  },
  (table) => [uniqueIndex('bid_file_once').on(table.bidId, table.fileId)],
);

/** A second member's word, asked above the company's limit. */
export const approval = sqliteTable(
  'approval',
  {
    id: id(),
    kind: text('kind', { enum: ['award'] }).notNull(),
    subjectType: text('subject_type').notNull(),
    subjectId: text('subject_id').notNull(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    requestedBy: text('requested_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    requestedAt: instant('requested_at').notNull(),
    state: text('state', { enum: approvalStates }).notNull().default('asked'),
    decidedBy: text('decided_by').references(() => user.id, { onDelete: 'restrict' }),
    decidedAt: instant('decided_at'),
    reason: text('reason').notNull().default(''),
    /** What exactly was asked: amount and version of the bid, so that a changed bid needs a new word. */
    payload: json<{ bidVersion: number; totalAmount: number; currency: string }>('payload').notNull(),
    version: version(),
  },
  (table) => [
    index('approval_subject').on(table.subjectType, table.subjectId),
    index('approval_company').on(table.companyId, table.state),
  ],
);
