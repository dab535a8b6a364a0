import { and, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { moveBid } from '../bids/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { bid } from '../db/schema/bids.ts';
import { requestFile } from '../db/schema/requests.ts';
import { closeFileToVerified } from '../files/index.ts';
import { removeFromSearch, requestForUpdate, setRequestState, type RequestRow } from '../requests/index.ts';
import { interestedCompanies } from './interested-companies.ts';

/** What happens to a request that ends without an award: bids lapse, files close, bidders are told. */
export async function endWithoutAward(
  tx: Tx,
  by: Actor | 'system',
  row: RequestRow,
  end: { event: 'withdraw' | 'lapse'; reason: string; expectedVersion?: number },
): Promise<void> {
  await setRequestState(tx, by, row, end.event, {
    set: { withdrawReason: end.reason },
    detail: { reason: end.reason },
    ...(end.expectedVersion === undefined ? {} : { expectedVersion: end.expectedVersion }),
  });
  if (row.state === 'draft') return;
  await removeFromSearch(tx, row.id);
  const files = await tx.select().from(requestFile).where(eq(requestFile.requestId, row.id));
  for (const { fileId } of files) await closeFileToVerified(tx, fileId);
  const told = await interestedCompanies(tx, row.id);
  const bids = await tx
    .select()
    .from(bid)
    .where(and(eq(bid.requestId, row.id), inArray(bid.state, ['draft', 'submitted', 'to-confirm'])));
  for (const one of bids) await moveBid(tx, by, one, 'lapse');
  const withdrawn = end.event === 'withdraw';
  const name = `R-${row.number} “${row.title}”`;
  for (const companyId of told) {
    await notifyCompany(tx, companyId, ['estimator'], {
      kind: withdrawn ? 'request-withdrawn' : 'request-lapsed',
      subject: withdrawn ? `Request ${name} was withdrawn` : `Request ${name} has lapsed`,
      content: {
        heading: withdrawn ? `${name} was withdrawn by the buyer` : `${name} has lapsed without an award`,
        paragraphs: [
          ...(end.reason ? [`Reason given: ${end.reason}`] : []),
          'Your bid, if you made one, has lapsed with it. Thank you for your work.',
        ],
        action: { label: 'See the request', path: `/requests/${row.id}` },
      },
      about: { type: 'request', id: row.id },
      href: `/requests/${row.id}`,
      dedupeKey: `request-${end.event}/${row.id}/${row.version}`,
    });
  }
  if (!withdrawn) {
    await notifyCompany(tx, row.companyId, ['engineer', 'purchaser'], {
      kind: 'request-lapsed',
      subject: `Your request ${name} has lapsed`,
      content: {
        heading: `${name} has lapsed`,
        paragraphs: [
          'It was not awarded in time. Its specification stays on record; a new request can start from it.',
        ],
        action: { label: 'See the request', path: `/requests/${row.id}` },
      },
      about: { type: 'request', id: row.id },
      href: `/requests/${row.id}`,
      dedupeKey: `request-lapsed-own/${row.id}/${row.version}`,
    });
  }
}

/** Withdraws a draft or a request without award, with a reason that bidders read. */
export async function withdrawRequest(
  db: Database,
  actor: Actor,
  input: { requestId: string; version: number; reason: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.withdraw', { companyId: row.companyId });
    if (row.state !== 'draft' && input.reason.trim() === '') {
      throw new AppError('invalid-input', { fields: { reason: 'Say why: bidders have put work into it.' } });
    }
    await endWithoutAward(tx, actor, row, {
      event: 'withdraw',
      reason: input.reason.trim().slice(0, 1000),
      expectedVersion: input.version,
    });
  });
}
