import { eq } from 'drizzle-orm';
import type { Reader } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';

export async function companyName(reader: Reader, id: string): Promise<string> {
  const [row] = await reader.select({ name: company.name }).from(company).where(eq(company.id, id));
  return row?.name ?? '';
}
