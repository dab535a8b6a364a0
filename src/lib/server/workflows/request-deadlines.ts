import { and, asc, eq, inArray, isNull, lte } from 'drizzle-orm';
import { dayMs, formatWindowEnd, hourMs } from '../../domain/dates.ts';
import { closesSoonHours, lapseAfterDays } from '../../domain/request-states.ts';
import { businessNow } from '../adapters/clock.ts';
import { handedInBids } from '../bids/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact, type Database } from '../db/index.ts';
import { request } from '../db/schema/requests.ts';
import { removeFromSearch, requestForUpdate, setRequestState } from '../requests/index.ts';
import { interestedCompanies } from './interested-companies.ts';
import { endWithoutAward } from './withdraw-request.ts';

const atOnce = 50;

/** Reminds bidders, once, when bids close within two days. */
async function remindOfClosing(db: Database, now: number): Promise<void> {
  const due = await db
    .select({ id: request.id })
    .from(request)
    .where(
      and(
        eq(request.state, 'posted'),
        isNull(request.closeReminderAt),
        lte(request.closesAt, now + closesSoonHours * hourMs),
      ),
    )
    .orderBy(asc(request.closesAt))
    .limit(atOnce);
  for (const { id } of due) {
    await transact(db, async (tx) => {
      const row = await requestForUpdate(tx, id);
      if (row.state !== 'posted' || row.closeReminderAt !== null || row.closesAt === null) return;
      await tx.update(request).set({ closeReminderAt: now }).where(eq(request.id, id));
      if (row.closesAt <= now) return;
      for (const companyId of await interestedCompanies(tx, id)) {
        await notifyCompany(tx, companyId, ['estimator'], {
          kind: 'bids-close-soon',
          subject: `Bids close soon: ${row.title}`,
          content: {
            heading: `Bids for “${row.title}” close ${formatWindowEnd(row.closesAt, row.buyerZone ?? 'UTC')}`,
            paragraphs: ['A bid that is still a draft then lapses.'],
            facts: [['Time zone', row.buyerZone ?? 'UTC']],
            action: { label: 'Go to your bid', path: `/requests/${id}/bid` },
          },
          about: { type: 'request', id },
          href: `/requests/${id}/bid`,
          dedupeKey: `bids-close-soon/${id}`,
        });
      }
    });
  }
}

/** Closes requests whose last day is over, and tells the buyer how many bids there are. */
async function closeDue(db: Database, now: number): Promise<void> {
  const due = await db
    .select({ id: request.id })
    .from(request)
    .where(and(eq(request.state, 'posted'), lte(request.closesAt, now)))
    .orderBy(asc(request.closesAt))
    .limit(atOnce);
  for (const { id } of due) {
    await transact(db, async (tx) => {
      const row = await requestForUpdate(tx, id);
      if (row.state !== 'posted' || row.closesAt === null || row.closesAt > now) return;
      await setRequestState(tx, 'system', row, 'close', { set: { closedAt: now } });
      await removeFromSearch(tx, id);
      const bids = (await handedInBids(tx, id)).filter(({ bid }) => bid.state === 'submitted').length;
      await notifyCompany(tx, row.companyId, ['engineer', 'purchaser'], {
        kind: 'bids-closed',
        subject: `Bids are closed: R-${row.number} “${row.title}”`,
        content: {
          heading: `Bids for R-${row.number} “${row.title}” are closed`,
          paragraphs: [
            bids === 0
              ? 'No bid came in. You can start a new request from this one.'
              : `${bids === 1 ? 'One bid is' : `${bids} bids are`} ready to be compared.`,
          ],
          action: { label: 'Compare bids', path: `/requests/${id}/compare` },
        },
        about: { type: 'request', id },
        href: `/requests/${id}/compare`,
        dedupeKey: `bids-closed/${id}`,
      });
    });
  }
}

/** Lets requests lapse that nobody awarded for a long time after closing. */
async function lapseOld(db: Database, now: number): Promise<void> {
  const due = await db
    .select({ id: request.id })
    .from(request)
    .where(
      and(
        inArray(request.state, ['closed', 're-opened']),
        lte(request.closesAt, now - lapseAfterDays * dayMs),
      ),
    )
    .orderBy(asc(request.closesAt))
    .limit(atOnce);
  for (const { id } of due) {
    await transact(db, async (tx) => {
      const row = await requestForUpdate(tx, id);
      if (row.state !== 'closed' && row.state !== 're-opened') return;
      // A re-opened request had an order in between: its time counts from there.
      if (row.state === 're-opened' && row.updatedAt > now - lapseAfterDays * dayMs) return;
      await endWithoutAward(tx, 'system', row, {
        event: 'lapse',
        reason: `Not awarded within ${lapseAfterDays} days of closing.`,
      });
    });
  }
}

/** Everything about requests that happens by itself when its time has come. */
export async function runRequestDeadlines(db: Database): Promise<void> {
  const now = await businessNow(db);
  await remindOfClosing(db, now);
  await closeDue(db, now);
  await lapseOld(db, now);
}
