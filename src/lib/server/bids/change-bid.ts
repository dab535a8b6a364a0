import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { bidMachine, daysHeldAgain, type BidEvent } from '../../domain/bid.ts';
import { addDays, dateIn } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { bid, bidException } from '../db/schema/bids.ts';
import { transition } from '../db/transition.ts';
import { companyName } from './company-name.ts';
import { mailAskedAgain, mailBidConfirmed, mailBidWithdrawn } from './mails.ts';
import { bidById, requestById, type BidRow } from './queries.ts';
import { requireOpen } from './save-bid.ts';

export async function moveBid(
  tx: Tx,
  by: By,
  row: BidRow,
  event: BidEvent,
  expectedVersion?: number,
): Promise<BidRow> {
  await transition(tx, {
    machine: bidMachine,
    table: bid,
    column: bid.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
    companyId: row.companyId,
    ...(expectedVersion === undefined ? {} : { expectedVersion }),
  });
  return bidById(tx, row.id);
}

interface Seen {
  bidId: string;
  version: number;
}

/** Takes a submitted bid back into the draft state, while the request is open for bids. */
export async function reviseBid(db: Database, actor: Actor, { bidId, version }: Seen): Promise<BidRow> {
  return transact(db, async (tx) => {
    const row = await bidById(tx, bidId);
    requireAccess(actor, 'bid.edit', { companyId: row.companyId });
    requireOpen(await requestById(tx, row.requestId), await businessNow(tx));
    return moveBid(tx, actor, row, 'revise', version);
  });
}

/** Withdraws a bid at any time before the award; the buyer is told if it had been handed in. */
export async function withdrawBid(db: Database, actor: Actor, { bidId, version }: Seen): Promise<BidRow> {
  return transact(db, async (tx) => {
    const row = await bidById(tx, bidId);
    requireAccess(actor, 'bid.edit', { companyId: row.companyId });
    const after = await moveBid(tx, actor, row, 'withdraw', version);
    if (row.state !== 'draft') {
      const request = await requestById(tx, row.requestId);
      await mailBidWithdrawn(tx, request, after, await companyName(tx, row.companyId));
    }
    return after;
  });
}

/** A bid that is taken up again after an order fell through holds for another while. */
async function holdOn(tx: Tx, row: BidRow, zone: string): Promise<void> {
  const until = addDays(dateIn(zone, await businessNow(tx)), daysHeldAgain);
  if (row.validUntil >= until) return;
  await tx.update(bid).set({ validUntil: until }).where(eq(bid.id, row.id));
}

/**
 * The buyer turns to a bid that was not selected, because the order of the other one fell through. It
 * can be awarded once its bidder has confirmed that it still holds.
 */
export async function askBidAgain(db: Database, actor: Actor, { bidId, version }: Seen): Promise<BidRow> {
  return transact(db, async (tx) => {
    const row = await bidById(tx, bidId);
    const request = await requestById(tx, row.requestId);
    requireAccess(actor, 'award.make', { companyId: request.companyId });
    requireVerifiedEmail(actor);
    if (request.state !== 're-opened' || row.state !== 'not-selected') {
      throw new AppError('state-conflict', {
        detail: 'A bid is asked again when the order of another one fell through.',
      });
    }
    const after = await moveBid(tx, actor, row, 'ask-confirmation', version);
    await mailAskedAgain(tx, request, after);
    return after;
  });
}

/** The bidder's word that the bid holds as the buyer wants it: without the refused exceptions. */
export async function confirmBid(db: Database, actor: Actor, { bidId, version }: Seen): Promise<BidRow> {
  return transact(db, async (tx) => {
    const row = await bidById(tx, bidId);
    requireAccess(actor, 'bid.edit', { companyId: row.companyId });
    const request = await requestById(tx, row.requestId);
    const after = await moveBid(tx, actor, row, 'confirm', version);
    if (request.state === 're-opened') await holdOn(tx, after, request.buyerZone ?? 'UTC');
    await tx.update(bidException).set({ refusalConfirmed: true }).where(eq(bidException.bidId, bidId));
    if (request.currentSpecificationId) {
      await tx.update(bid).set({ specificationId: request.currentSpecificationId }).where(eq(bid.id, bidId));
    }
    await mailBidConfirmed(tx, request, after, await companyName(tx, row.companyId));
    return after;
  });
}
