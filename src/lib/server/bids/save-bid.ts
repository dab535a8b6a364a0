import { and, eq, inArray, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { bidTotals } from '../../domain/bid.ts';
import { AppError } from '../../domain/errors.ts';
import type { Currency } from '../../domain/money.ts';
import type { BidFormValues } from '../../schemas/forms/bid.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { nextNumber } from '../db/counters.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { bid, bidException, bidFile } from '../db/schema/bids.ts';
import { requireCleanFile } from '../files/index.ts';
import { bidOf, exceptionsOf, requestById, type BidRow, type RequestRow } from './queries.ts';
import { isOpenForBids } from './rules.ts';

export interface SaveBidInput {
  requestId: string;
  companyId: string;
  /** Random, made with the form: pressing twice makes one bid. */
  commandId: string;
  /** The version seen; null for a new bid. */
  version: number | null;
  values: BidFormValues;
}

/** Throws unless the request takes bids now and is not the bidder's own. Returns it with its terms. */
export function requireOpen(request: RequestRow, now: number) {
  if (!isOpenForBids(request, now) || !request.commercial || !request.currentSpecificationId) {
    throw new AppError('state-conflict', { detail: 'This request does not take bids any more.' });
  }
  return {
    commercial: request.commercial,
    specificationId: request.currentSpecificationId,
    closesAt: request.closesAt ?? 0,
    buyerZone: request.buyerZone ?? 'UTC',
  };
}

async function writeExceptions(tx: Tx, bidId: string, wanted: BidFormValues['exceptions']): Promise<void> {
  // A decision stands for the words it was made on; changed words are open again.
  const before = await exceptionsOf(tx, [bidId]);
  const keep = new Set<string>();
  for (const [position, { subject, text }] of wanted.entries()) {
    const same = before.find((row) => !keep.has(row.id) && row.subject === subject && row.text === text);
    if (same) {
      keep.add(same.id);
      await tx.update(bidException).set({ position }).where(eq(bidException.id, same.id));
    } else {
      const id = newId();
      keep.add(id);
      await tx.insert(bidException).values({ id, bidId, subject, text, position });
    }
  }
  const gone = before.filter((row) => !keep.has(row.id)).map((row) => row.id);
  if (gone.length > 0) await tx.delete(bidException).where(inArray(bidException.id, gone));
}

async function writeFiles(tx: Tx, bidId: string, companyId: string, fileIds: string[]): Promise<void> {
  for (const fileId of new Set(fileIds)) {
    await requireCleanFile(tx, fileId, { ownerCompanyId: companyId, purpose: 'bid-attachment' });
    await tx.insert(bidFile).values({ id: newId(), bidId, fileId }).onConflictDoNothing();
  }
}

/** Saves a draft bid, making it on the first call. Only drafts can be changed; a submitted bid is revised first. */
export async function saveBid(db: Database, actor: Actor, input: SaveBidInput): Promise<BidRow> {
  requireAccess(actor, 'bid.edit', { companyId: input.companyId });
  return transact(db, (tx) => saveBidIn(tx, actor, input));
}

export async function saveBidIn(tx: Tx, actor: Actor, input: SaveBidInput): Promise<BidRow> {
  const request = await requestById(tx, input.requestId);
  const now = await businessNow(tx);
  if (request.state === 'draft' || actor.memberships.some((m) => m.companyId === request.companyId)) {
    throw new AppError('not-found');
  }
  const { commercial, specificationId } = requireOpen(request, now);
  const { values } = input;
  const totals = bidTotals(values.body, commercial.currency);
  const columns = {
    specificationId,
    currency: commercial.currency as Currency,
    body: values.body,
    netAmount: totals.net,
    taxAmount: totals.tax,
    freightAmount: totals.freight,
    totalAmount: totals.total,
    leadTimeWorkingDays: values.leadTimeWorkingDays,
    validUntil: values.validUntil,
  };
  const existing = await bidOf(tx, input.requestId, input.companyId);
  let id: string;
  if (!existing) {
    id = newId();
    await tx.insert(bid).values({
      id,
      requestId: input.requestId,
      companyId: input.companyId,
      number: await nextNumber(tx, input.companyId, 'bid'),
      ...columns,
      createdBy: actor.userId,
      createdAt: now,
      commandId: input.commandId,
    });
    await audit(tx, actor, {
      action: 'bid.create',
      subjectType: 'bid',
      subjectId: id,
      companyId: input.companyId,
    });
  } else {
    id = existing.id;
    // The same press of the same button: keep what it made.
    if (existing.commandId === input.commandId && input.version === null && existing.state === 'draft') {
      input = { ...input, version: existing.version };
    }
    if (existing.state !== 'draft') {
      throw new AppError('state-conflict', {
        detail: 'This bid is handed in; revise it before changing it.',
      });
    }
    const result = await tx
      .update(bid)
      .set({ ...columns, version: sql`${bid.version} + 1` })
      .where(and(eq(bid.id, id), eq(bid.version, input.version ?? 0)));
    if (result.rowsAffected !== 1) throw new AppError('version-conflict', { data: existing });
  }
  await writeExceptions(tx, id, values.exceptions);
  await writeFiles(tx, id, input.companyId, values.fileIds);
  const saved = await bidOf(tx, input.requestId, input.companyId);
  if (!saved) throw new Error('the bid was not saved');
  return saved;
}
