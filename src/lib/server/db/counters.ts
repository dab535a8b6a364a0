import { sql } from 'drizzle-orm';
import type { Tx } from './index.ts';
import { counter } from './schema/companies.ts';

/** The next number of a kind for a company, from 1001, in the caller's transaction. */
export async function nextNumber(tx: Tx, companyId: string, kind: string): Promise<number> {
  const [row] = await tx
    .insert(counter)
    .values({ companyId, kind, last: 1001 })
    .onConflictDoUpdate({
      target: [counter.companyId, counter.kind],
      set: { last: sql`${counter.last} + 1` },
    })
    .returning({ last: counter.last });
  if (!row) throw new Error('the counter did not answer');
  return row.last;
}
