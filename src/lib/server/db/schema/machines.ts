import { index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import type { Machine } from '../../../induction/check/types.ts';
import { user } from './auth.ts';
import { id, instant, json, version } from './columns.ts';
import { company } from './companies.ts';

/** A buyer's machine in its present state; earlier states are its revisions. */
export const machine = sqliteTable(
  'machine',
  {
    id: id(),
    companyId: text('company_id')
      .notNull()
      .references(() => company.id, { onDelete: 'restrict' }),
    name: text('name').notNull(),
    body: json<Machine>('body').notNull(),
    archivedAt: instant('archived_at'),
    createdAt: instant('created_at').notNull(),
    updatedAt: instant('updated_at').notNull(),
    createdBy: text('created_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [index('machine_company').on(table.companyId, table.archivedAt, table.name)],
);

export const machineRevision = sqliteTable(
  'machine_revision',
  {
    id: id(),
    machineId: text('machine_id')
      .notNull()
      .references(() => machine.id, { onDelete: 'restrict' }),
    /** The machine's version that this is. */
    number: integer('number').notNull(),
    body: json<Machine>('body').notNull(),
    savedAt: instant('saved_at').notNull(),
    savedBy: text('saved_by')
      .notNull()
      .references(() => user.id, { onDelete: 'restrict' }),
  },
  (table) => [uniqueIndex('machine_revision_number').on(table.machineId, table.number)],
);
