import { sql } from 'drizzle-orm';
import { index, integer, primaryKey, sqliteTable, text } from 'drizzle-orm/sqlite-core';
import { fileMachine, filePurposes } from '../../../domain/files.ts';
import { user } from './auth.ts';
import { flag, id, instant, version } from './columns.ts';
import { company } from './companies.ts';

/** A file in the object store. Names live here only; the key in the store is random and never reused. */
export const file = sqliteTable(
  'file',
  {
    id: id(),
    ownerCompanyId: text('owner_company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    uploadedBy: text('uploaded_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    purpose: text('purpose', { enum: filePurposes }).notNull(),
    name: text('name').notNull(),
    contentType: text('content_type').notNull(),
    size: integer('size').notNull(),
    /** Hex; computed by the server from what the store holds. */
    sha256: text('sha256'),
    /** Where the verified bytes are, once clean. No slot is ever signed for this key, so they stay as verified. */
    storageKey: text('storage_key').unique(),
    /** Where the browser puts them; emptied after verification. */
    incomingKey: text('incoming_key').notNull().unique(),
    /** Upload id of the store while a file comes in parts. */
    multipartId: text('multipart_id'),
    state: text('state', { enum: fileMachine.states as ['pending', 'clean', 'refused'] })
      .notNull()
      .default('pending'),
    refusedReason: text('refused_reason'),
    /** Every verified fabricator may read it (sketches of open requests). */
    openToVerified: flag('open_to_verified').notNull().default(false),
    /** Business time. */
    createdAt: instant('created_at').notNull(),
    verifiedAt: instant('verified_at'),
    /** Real time after which an unfinished upload is cleared away. */
    expiresAt: instant('expires_at').notNull(),
    version: version(),
  },
  (table) => [
    index('file_owner').on(table.ownerCompanyId, table.purpose),
    index('file_unfinished')
      .on(table.expiresAt)
      .where(sql`${table.state} = 'pending'`),
  ],
);

/** Companies beside the owner that may read a file. */
export const fileAudience = sqliteTable(
  'file_audience',
  {
    fileId: text('file_id')
      .notNull()
      .references(() => file.id, { onDelete: 'restrict' }),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    grantedAt: instant('granted_at').notNull(),
  },
  (table) => [primaryKey({ columns: [table.fileId, table.companyId] })],
);

export const companyDocumentKinds = [
  'registration',
  'insurance',
  'certificate',
  'equipment',
  'other',
] as const;

/** Papers of a company; archived, never removed. */
export const companyDocument = sqliteTable(
  'company_document',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    fileId: text('file_id')
      .notNull()
      .unique()
      .references(() => file.id, { onDelete: 'restrict' }),
    kind: text('kind', { enum: companyDocumentKinds }).notNull(),
    title: text('title').notNull(),
    addedBy: text('added_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    addedAt: instant('added_at').notNull(),
    archivedAt: instant('archived_at'),
    version: version(),
  },
  (table) => [index('company_document_company').on(table.companyId, table.archivedAt)],
);
