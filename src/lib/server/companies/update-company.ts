import { and, eq, ne } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { sameNameAs } from './create-company.ts';

export interface UpdateCompanyInput {
  companyId: string;
  name: string;
  timeZone: string;
  taxNumber: string;
  website: string;
  about: string;
  version: number;
}

type CompanyRow = typeof company.$inferSelect;

/** The row for a change; a version that is no longer the present one is a conflict with the newer state. */
export async function companyForUpdate(tx: Tx, companyId: string, version: number): Promise<CompanyRow> {
  const [row] = await tx.select().from(company).where(eq(company.id, companyId));
  if (!row) throw new AppError('not-found');
  if (row.version !== version) throw new AppError('version-conflict', { data: profileOf(row) });
  return row;
}

/** What members see and edit of their company. */
export function profileOf(row: CompanyRow) {
  return {
    name: row.name,
    timeZone: row.timeZone,
    taxNumber: row.taxNumber,
    website: row.website,
    about: row.about,
    approvalLimit: row.approvalLimit,
    version: row.version,
  };
}

export async function updateCompany(db: Database, actor: Actor, input: UpdateCompanyInput): Promise<void> {
  requireAccess(actor, 'company.edit', { companyId: input.companyId });
  const { companyId, version, ...values } = input;
  await transact(db, async (tx) => {
    const before = await companyForUpdate(tx, companyId, version);
    const [sameName] = await tx
      .select({ id: company.id })
      .from(company)
      .where(and(sameNameAs(values.name), ne(company.id, companyId)));
    if (sameName) {
      throw new AppError('already-exists', { fields: { name: 'Another company has this name.' } });
    }
    await tx
      .update(company)
      .set({ ...values, version: version + 1 })
      .where(eq(company.id, companyId));
    await audit(tx, actor, {
      action: 'company.update',
      subjectType: 'company',
      subjectId: companyId,
      companyId,
      detail: { before: profileOf(before), after: values },
    });
  });
}

/** Above this amount (minor units of the company's currency) a second owner or purchaser approves; null = no limit. */
export async function setApprovalLimit(
  db: Database,
  actor: Actor,
  input: { companyId: string; approvalLimit: number | null; version: number },
): Promise<void> {
  requireAccess(actor, 'company.edit', { companyId: input.companyId });
  const { companyId, approvalLimit, version } = input;
  await transact(db, async (tx) => {
    const before = await companyForUpdate(tx, companyId, version);
    if (before.kind !== 'buyer') {
      throw new AppError('state-conflict', {
        detail: 'Only a buyer awards, so only a buyer has an approval limit.',
      });
    }
    await tx
      .update(company)
      .set({ approvalLimit, version: version + 1 })
      .where(eq(company.id, companyId));
    await audit(tx, actor, {
      action: 'company.set-approval-limit',
      subjectType: 'company',
      subjectId: companyId,
      companyId,
      detail: { from: before.approvalLimit, to: approvalLimit, currency: before.currency },
    });
  });
}
