import { planProblems, type BidBody } from '../../domain/bid.ts';
import type { Commercial } from '../../domain/commercial.ts';
import { dateIn, endOfDate } from '../../domain/dates.ts';
import type { RequestState } from '../../domain/request-states.ts';

/** Until when a bid holds: the end of its last day in the buyer's zone, ms UTC. */
export function validityEnd(validUntil: string, buyerZone: string): number {
  return endOfDate(buyerZone, validUntil);
}

export function isOpenForBids(
  request: { state: RequestState; closesAt: number | null },
  now: number,
): boolean {
  return request.state === 'posted' && request.closesAt !== null && request.closesAt > now;
}

/** Messages by form field for what a bid still needs before it can be handed in. */
export function submissionProblems(
  bid: { body: BidBody; leadTimeWorkingDays: number; validUntil: string },
  request: { commercial: Commercial; closesAt: number; buyerZone: string },
  now: number,
): Record<string, string> {
  const problems: Record<string, string> = {};
  if (!bid.body.lines.some((line) => line.kind === 'coil' && line.amount > 0)) {
    problems['price.coil'] = 'Enter a price for the coil.';
  }
  for (const [kind, message] of Object.entries(
    planProblems(bid.body.milestonePlan, request.commercial.milestoneLimits),
  )) {
    problems[kind === 'plan' ? 'share.build' : `share.${kind}`] ??= message;
  }
  if (bid.leadTimeWorkingDays < 1) problems['leadTime'] = 'Enter the lead time in working days.';
  if (!/^\d{4}-\d{2}-\d{2}$/.test(bid.validUntil)) {
    problems['validUntil'] = 'Enter until when the bid holds.';
  } else if (validityEnd(bid.validUntil, request.buyerZone) < Math.max(now, request.closesAt)) {
    problems['validUntil'] =
      `The bid has to hold at least until bids close (${dateIn(request.buyerZone, request.closesAt)}).`;
  }
  return problems;
}
