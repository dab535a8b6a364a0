import { sql } from 'drizzle-orm';
import { index, integer, primaryKey, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import {
  verificationMachine,
  type ShopCapabilities,
  type VerificationState,
  type VerifiedItem,
} from '../../../domain/verification.ts';
import { user } from './auth.ts';
import { id, instant, json, version } from './columns.ts';
import { company, type PostalAddress } from './companies.ts';
import { companyDocument } from './files.ts';

/** What a fabricator says of itself in the directory; declared, not verified. */
export const fabricatorProfile = sqliteTable('fabricator_profile', {
  companyId: text('company_id')
    .primaryKey()
    .references(() => company.id, { onDelete: 'restrict' }),
  statement: text('statement').notNull(),
  capabilities: json<ShopCapabilities>('capabilities').notNull(),
  worksAddress: json<PostalAddress>('works_address').notNull(),
  updatedAt: instant('updated_at').notNull(),
  version: version(),
});

/** One asking to be verified, with what was declared at that moment, and the decision on it. */
export const verificationCase = sqliteTable(
  'verification_case',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    state: text('state', {
      enum: verificationMachine.states as [VerificationState, ...VerificationState[]],
    })
      .notNull()
      .default('asked'),
    statement: text('statement').notNull(),
    capabilities: json<ShopCapabilities>('capabilities').notNull(),
    worksAddress: json<PostalAddress>('works_address').notNull(),
    askedBy: text('asked_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    askedAt: instant('asked_at').notNull(),
    decidedBy: text('decided_by').references(() => user.id, { onDelete: 'restrict' }),
    decidedAt: instant('decided_at'),
    /** What exactly was verified, and until when. */
    verifiedItems: json<VerifiedItem[]>('verified_items'),
    verifiedUntil: instant('verified_until'),
    /** Reasons of the decision; told to the fabricator. */
    reasons: text('reasons'),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('verification_one_open')
      .on(table.companyId)
      .where(sql`${table.state} = 'asked'`),
    index('verification_queue').on(table.state, table.askedAt),
    index('verification_company').on(table.companyId, table.askedAt),
  ],
);

/** The documents that were named in an asking. */
export const verificationDocument = sqliteTable(
  'verification_document',
  {
    caseId: text('case_id')
      .notNull()
      .references(() => verificationCase.id, { onDelete: 'restrict' }),
    documentId: text('document_id')
      .notNull()
      .references(() => companyDocument.id, { onDelete: 'restrict' }),
  },
  (table) => [primaryKey({ columns: [table.caseId, table.documentId] })],
);

/** One seal over a batch of audit rows, chained to the seal before it. */
export const auditSeal = sqliteTable('audit_seal', {
  number: integer('number').primaryKey(),
  /** Real time. */
  at: instant('at').notNull(),
  rowCount: integer('row_count').notNull(),
  previous: text('previous').notNull(),
  seal: text('seal').notNull().unique(),
});
