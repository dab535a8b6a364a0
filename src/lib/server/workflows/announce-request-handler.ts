import { and, asc, eq, gt } from 'drizzle-orm';
import { formatWindowEnd } from '../../domain/dates.ts';
import { businessNow } from '../adapters/clock.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import type { JobHandler } from '../jobs/index.ts';
import { requestForUpdate } from '../requests/index.ts';

const batch = 25;

/** Mails in small transactions; a second run after a crash adds nothing, by the dedupe key. */
export const tellFabricators: JobHandler<{ requestId: string }> = async ({ requestId }, { db, signal }) => {
  const row = await requestForUpdate(db, requestId);
  const now = await businessNow(db);
  const [buyer] = await db.select({ name: company.name }).from(company).where(eq(company.id, row.companyId));
  let after = '';
  while (!signal.aborted && row.state === 'posted') {
    const fabricators = await db
      .select({ id: company.id })
      .from(company)
      .where(and(eq(company.kind, 'fabricator'), gt(company.verifiedUntil, now), gt(company.id, after)))
      .orderBy(asc(company.id))
      .limit(batch);
    if (fabricators.length === 0) return;
    await transact(db, async (tx) => {
      for (const { id } of fabricators) {
        await notifyCompany(tx, id, ['estimator'], {
          kind: 'request-posted',
          subject: `New request: ${row.title}`,
          content: {
            heading: `${buyer?.name ?? 'A buyer'} asks for bids: ${row.title}`,
            paragraphs: [
              'The specification with its figures, the bank ladder and a shop sheet are on the request’s page.',
            ],
            facts: [
              ['Coils', String(row.quantity ?? 1)],
              ['Bids close', formatWindowEnd(row.closesAt ?? now, row.buyerZone ?? 'UTC')],
            ],
            action: { label: 'See the request', path: `/requests/${row.id}` },
          },
          about: { type: 'request', id: row.id },
          href: `/requests/${row.id}`,
          dedupeKey: `request-posted/${row.id}`,
        });
      }
    });
    after = fabricators.at(-1)?.id ?? '';
  }
};
