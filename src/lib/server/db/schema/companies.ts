import { sql } from 'drizzle-orm';
import { index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import type { Role } from '../../../domain/roles.ts';
import { user } from './auth.ts';
import { flag, id, instant, json, version } from './columns.ts';

export interface PostalAddress {
  name: string;
  line1: string;
  line2: string;
  postalCode: string;
  city: string;
  region: string;
  /** ISO 3166-1 alpha-2. */
  country: string;
}

export const company = sqliteTable('company', {
  id: id(),
  kind: text('kind', { enum: ['buyer', 'fabricator'] }).notNull(),
  name: text('name').notNull().unique(),
  currency: text('currency', { enum: ['EUR', 'USD', 'GBP'] })
    .notNull()
    .default('EUR'),
  timeZone: text('time_zone').notNull().default('Europe/Berlin'),
  taxNumber: text('tax_number').notNull().default(''),
  website: text('website').notNull().default(''),
  about: text('about').notNull().default(''),
  /** Above this, in minor units of the company's currency, a second member approves an award. */
  approvalLimit: integer('approval_limit'),
  /** Fabricators: verified by an admin until then; null = not verified. Buyers need none. */
  verifiedUntil: instant('verified_until'),
  createdAt: instant('created_at').notNull(),
  createdBy: text('created_by')
    .notNull()
    .references(() => user.id, { onDelete: 'restrict' }),
  commandId: text('command_id').notNull().unique(),
  version: version(),
});

export const membership = sqliteTable(
  'membership',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    roles: json<Role[]>('roles').notNull(),
    active: flag('active').notNull().default(true),
    createdAt: instant('created_at').notNull(),
    version: version(),
  },
  (table) => [
    uniqueIndex('membership_company_user').on(table.companyId, table.userId),
    index('membership_user').on(table.userId),
  ],
);

export const invitation = sqliteTable(
  'invitation',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    email: text('email').notNull(),
    roles: json<Role[]>('roles').notNull(),
    /** SHA-256 of the token in the mail; the token itself is never stored. */
    tokenHash: text('token_hash').notNull().unique(),
    state: text('state', { enum: ['open', 'accepted', 'withdrawn'] })
      .notNull()
      .default('open'),
    expiresAt: instant('expires_at').notNull(),
    invitedBy: text('invited_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    createdAt: instant('created_at').notNull(),
    acceptedBy: text('accepted_by').references(() => user.id, { onDelete: 'restrict' }),
    version: version(),
  },
  (table) => [
    index('invitation_company').on(table.companyId),
    // One open invitation per person and company, also for a double click.
    uniqueIndex('invitation_open')
      .on(table.companyId, table.email)
      .where(sql`state = 'open'`),
  ],
);

export const companyAddress = sqliteTable(
  'company_address',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    purpose: text('purpose', { enum: ['delivery', 'invoice', 'works'] }).notNull(),
    address: json<PostalAddress>('address').notNull(),
    archivedAt: instant('archived_at'),
    version: version(),
  },
  (table) => [index('company_address_company').on(table.companyId)],
);

/** Numbers that people see (R-1042), counted per company in the same transaction. */
export const counter = sqliteTable(
  'counter',
  {
    companyId: text('company_id').notNull(),
    kind: text('kind').notNull(),
    last: integer('last').notNull(),
  },
  (table) => [uniqueIndex('counter_company_kind').on(table.companyId, table.kind)],
);
