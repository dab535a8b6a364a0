import { and, asc, desc, eq, inArray } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import type { Reader } from '../db/index.ts';
import { bid, bidException, bidFile } from '../db/schema/bids.ts';
import { company } from '../db/schema/companies.ts';
import { file } from '../db/schema/files.ts';
import { request } from '../db/schema/requests.ts';

export type BidRow = typeof bid.$inferSelect;
export type ExceptionRow = typeof bidException.$inferSelect;
export type RequestRow = typeof request.$inferSelect;

export async function bidById(reader: Reader, id: string): Promise<BidRow> {
  const [row] = await reader.select().from(bid).where(eq(bid.id, id));
  if (!row) throw new AppError('not-found');
  return row;
}

export async function bidOf(
  reader: Reader,
  requestId: string,
  companyId: string,
): Promise<BidRow | undefined> {
  const [row] = await reader
    .select()
    .from(bid)
    .where(and(eq(bid.requestId, requestId), eq(bid.companyId, companyId)));
  return row;
}

export async function requestById(reader: Reader, id: string): Promise<RequestRow> {
  const [row] = await reader.select().from(request).where(eq(request.id, id));
  if (!row) throw new AppError('not-found');
  return row;
}

export async function exceptionsOf(reader: Reader, bidIds: readonly string[]): Promise<ExceptionRow[]> {
  if (bidIds.length === 0) return [];
  return reader
    .select()
    .from(bidException)
    .where(inArray(bidException.bidId, [...bidIds]))
    .orderBy(asc(bidException.bidId), asc(bidException.position));
}

export async function filesOf(reader: Reader, bidIds: readonly string[]) {
  if (bidIds.length === 0) return [];
  return reader
    .select({ bidId: bidFile.bidId, id: file.id, name: file.name, size: file.size })
    .from(bidFile)
    .innerJoin(file, eq(file.id, bidFile.fileId))
    .where(inArray(bidFile.bidId, [...bidIds]))
    .orderBy(asc(file.name));
}

/** Bids of a request that the buyer may see: everything that was ever handed in. */
export async function handedInBids(reader: Reader, requestId: string) {
  return reader
    .select({ bid, companyName: company.name, verifiedUntil: company.verifiedUntil })
    .from(bid)
    .innerJoin(company, eq(company.id, bid.companyId))
    .where(
      and(
        eq(bid.requestId, requestId),
        inArray(bid.state, ['submitted', 'to-confirm', 'awarded', 'not-selected', 'lapsed', 'withdrawn']),
      ),
    )
    .orderBy(asc(bid.totalAmount));
}

export async function bidsOfCompany(reader: Reader, companyIds: readonly string[], limit = 100) {
  if (companyIds.length === 0) return [];
  return reader
    .select({
      id: bid.id,
      number: bid.number,
      state: bid.state,
      requestId: bid.requestId,
      title: request.title,
      requestState: request.state,
      closesAt: request.closesAt,
      currency: bid.currency,
      totalAmount: bid.totalAmount,
      validUntil: bid.validUntil,
      companyId: bid.companyId,
    })
    .from(bid)
    .innerJoin(request, eq(request.id, bid.requestId))
    .where(inArray(bid.companyId, [...companyIds]))
    .orderBy(desc(bid.createdAt))
    .limit(limit);
}
