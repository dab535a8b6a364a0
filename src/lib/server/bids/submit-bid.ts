import type { Actor } from '../../domain/actor.ts';
import { bidMachine } from '../../domain/bid.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { companyName } from './company-name.ts';
import { transact, type Database } from '../db/index.ts';
import { transition } from '../db/transition.ts';
import { bid } from '../db/schema/bids.ts';
import { shareFile } from '../files/index.ts';
import { mailBidReceived } from './mails.ts';
import { bidById, filesOf, requestById, type BidRow } from './queries.ts';
import { submissionProblems } from './rules.ts';
import { requireOpen, saveBidIn, type SaveBidInput } from './save-bid.ts';

/** Saves what the form holds and hands the bid in: checked whole, sealed to the buyer, mailed. */
export async function submitBid(db: Database, actor: Actor, input: SaveBidInput): Promise<BidRow> {
  requireAccess(actor, 'bid.edit', { companyId: input.companyId });
  requireVerifiedEmail(actor);
  return transact(db, async (tx) => {
    const saved = await saveBidIn(tx, actor, input);
    const request = await requestById(tx, saved.requestId);
    const now = await businessNow(tx);
    const fields = submissionProblems(saved, requireOpen(request, now), now);
    if (Object.keys(fields).length > 0) throw new AppError('invalid-input', { fields });
    await transition(tx, {
      machine: bidMachine,
      table: bid,
      column: bid.state,
      columnName: 'state',
      id: saved.id,
      from: saved.state,
      event: 'submit',
      by: actor,
      companyId: saved.companyId,
      set: { submittedAt: now, submittedBy: actor.userId },
      detail: { totalAmount: saved.totalAmount, currency: saved.currency },
    });
    for (const file of await filesOf(tx, [saved.id])) await shareFile(tx, file.id, [request.companyId]);
    const submitted = await bidById(tx, saved.id);
    await mailBidReceived(tx, request, submitted, await companyName(tx, saved.companyId));
    return submitted;
  });
}
