import { and, eq, inArray, isNotNull, lt, notInArray, or } from 'drizzle-orm';
import { dateIn } from '../../domain/dates.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database } from '../db/index.ts';
import { bid } from '../db/schema/bids.ts';
import { request } from '../db/schema/requests.ts';
import { moveBid } from './change-bid.ts';
import { mailBidLapsed } from './mails.ts';
import { requestById } from './queries.ts';
import { validityEnd } from './rules.ts';

/** Lets bids lapse whose validity has ended, and drafts whose request takes no bids any more. */
export async function lapseBids(db: Database): Promise<number> {
  const now = await businessNow(db);
  // A date is over everywhere two days after it began in UTC; the exact end is checked per row.
  const dateLimit = dateIn('UTC', now + 86_400_000);
  const rows = await db
    .select({ bid, zone: request.buyerZone })
    .from(bid)
    .innerJoin(request, eq(request.id, bid.requestId))
    .where(
      or(
        and(inArray(bid.state, ['submitted', 'to-confirm']), lt(bid.validUntil, dateLimit)),
        and(
          eq(bid.state, 'draft'),
          isNotNull(request.postedAt),
          notInArray(request.state, ['posted', 'draft']),
        ),
      ),
    )
    .limit(200);
  let lapsed = 0;
  for (const { bid: row, zone } of rows) {
    if (row.state !== 'draft' && validityEnd(row.validUntil, zone ?? 'UTC') > now) continue;
    await transact(db, async (tx) => {
      const after = await moveBid(tx, 'system', row, 'lapse', row.version);
      await mailBidLapsed(tx, await requestById(tx, row.requestId), after);
    });
    lapsed += 1;
  }
  return lapsed;
}
