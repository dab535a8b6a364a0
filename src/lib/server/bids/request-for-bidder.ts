import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { addDays, dateIn } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { specification } from '../db/schema/requests.ts';
import { bidOf, requestById } from './queries.ts';
import { isOpenForBids } from './rules.ts';

/** What a bidder needs to know of a request to price it; an allow-list, the budget is not in it. */
export async function requestForBidder(
  reader: Reader,
  actor: Actor | null,
  requestId: string,
  companyId: string,
) {
  requireAccess(actor, 'bid.view-own', { companyId });
  const request = await requestById(reader, requestId);
  const mine = await bidOf(reader, requestId, companyId);
  // Who has bid may look at it for ever; others only while it is on the board.
  if (!mine) {
    if (request.state !== 'posted') throw new AppError('not-found');
    requireAccess(actor, 'board.view', { companyId });
  }
  const { commercial } = request;
  if (!commercial || !request.currentSpecificationId) throw new AppError('not-found');
  const [spec] = await reader
    .select({ number: specification.number, hash: specification.hash })
    .from(specification)
    .where(eq(specification.id, request.currentSpecificationId));
  const now = await businessNow(reader);
  const zone = request.buyerZone ?? 'UTC';
  return {
    id: request.id,
    number: request.number,
    title: request.title,
    state: request.state,
    open: isOpenForBids(request, now),
    closesAt: request.closesAt,
    zone,
    specification: spec ?? null,
    currency: commercial.currency,
    quantity: commercial.quantity,
    needBy: commercial.needBy,
    deliveryTerm: commercial.deliveryTerm,
    deliveryPlace: commercial.deliveryPlace,
    freeIssue: commercial.freeIssue,
    milestoneLimits: commercial.milestoneLimits,
    inspectionDays: commercial.inspectionDays,
    suggestedValidity: addDays(dateIn(zone, Math.max(now, request.closesAt ?? now)), 30),
  };
}
export type RequestForBidder = Awaited<ReturnType<typeof requestForBidder>>;
