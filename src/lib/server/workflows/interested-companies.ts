import { and, eq, ne } from 'drizzle-orm';
import type { Reader } from '../db/index.ts';
import { bid } from '../db/schema/bids.ts';
import { question } from '../db/schema/requests.ts';

/** Fabricators with a bid or a question on a request: who is told when something about it changes. */
export async function interestedCompanies(reader: Reader, requestId: string): Promise<string[]> {
  const bidders = await reader
    .selectDistinct({ id: bid.companyId })
    .from(bid)
    .where(and(eq(bid.requestId, requestId), ne(bid.state, 'withdrawn')));
  const askers = await reader
    .selectDistinct({ id: question.companyId })
    .from(question)
    .where(eq(question.requestId, requestId));
  return [...new Set([...bidders, ...askers].map((row) => row.id))];
}
