import { eq } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import type { Reader } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';

/** What of a buyer's company decides over an award. */
export async function companyTerms(reader: Reader, companyId: string) {
  const [row] = await reader
    .select({
      name: company.name,
      currency: company.currency,
      approvalLimit: company.approvalLimit,
      timeZone: company.timeZone,
    })
    .from(company)
    .where(eq(company.id, companyId));
  if (!row) throw new AppError('not-found');
  return row;
}
