import type { ExceptionRow, BidRow, RequestRow } from './queries.ts';
import { validityEnd } from './rules.ts';

export interface AwardQuestion {
  bid: BidRow;
  request: RequestRow;
  exceptions: readonly ExceptionRow[];
  payoutReady: boolean;
  now: number;
}

/** Why a bid cannot be awarded now, each in words for the buyer; empty when it can. */
export function awardObstacles({ bid, request, exceptions, payoutReady, now }: AwardQuestion): string[] {
  const obstacles: string[] = [];
  if (!['posted', 'closed', 're-opened'].includes(request.state)) {
    obstacles.push('The request is not open for an award.');
  }
  if (bid.state === 'to-confirm') obstacles.push('The bidder has to confirm the bid first.');
  else if (bid.state !== 'submitted') obstacles.push('The bid is not handed in.');
  if (validityEnd(bid.validUntil, request.buyerZone ?? 'UTC') <= now) {
    obstacles.push('Its validity has ended.');
  }
  const open = exceptions.filter((row) => row.state === 'open').length;
  if (open > 0) {
    obstacles.push(open === 1 ? 'One exception is undecided.' : `${open} exceptions are undecided.`);
  }
  if (exceptions.some((row) => row.state === 'refused' && !row.refusalConfirmed)) {
    obstacles.push('The bidder has not confirmed the bid without the refused exceptions.');
  }
  if (!payoutReady) obstacles.push('The fabricator’s payout account cannot receive money yet.');
  return obstacles;
}

/** True above the company's limit, and in another currency, where the limit says nothing. */
export function needsApproval(
  terms: { approvalLimit: number | null; currency: string },
  bid: { totalAmount: number; currency: string },
): boolean {
  if (terms.approvalLimit === null) return false;
  return bid.currency !== terms.currency || bid.totalAmount > terms.approvalLimit;
}
