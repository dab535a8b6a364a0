import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { exceptionMachine } from '../../domain/bid.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database } from '../db/index.ts';
import { bidException } from '../db/schema/bids.ts';
import { transition } from '../db/transition.ts';
import { moveBid } from './change-bid.ts';
import { mailExceptionRefused } from './mails.ts';
import { bidById, requestById } from './queries.ts';

export interface DecideExceptionInput {
  exceptionId: string;
  decision: 'accept' | 'refuse';
  reason: string;
}

/**
 * The buyer accepts or refuses one exception before the award. A refusal puts the bid back to its
 * bidder: it cannot be awarded before they confirm that it holds without the exception.
 */
export async function decideException(
  db: Database,
  actor: Actor,
  input: DecideExceptionInput,
): Promise<void> {
  await transact(db, async (tx) => {
    const [row] = await tx.select().from(bidException).where(eq(bidException.id, input.exceptionId));
    if (!row) throw new AppError('not-found');
    const bid = await bidById(tx, row.bidId);
    const request = await requestById(tx, bid.requestId);
    requireAccess(actor, 'bid.compare', { companyId: request.companyId });
    if (!['submitted', 'to-confirm'].includes(bid.state)) {
      throw new AppError('state-conflict', { detail: 'Exceptions are decided while the bid is handed in.' });
    }
    if (input.decision === 'refuse' && input.reason.trim() === '') {
      throw new AppError('invalid-input', {
        fields: { reason: 'Say why, so that the bidder can judge it.' },
      });
    }
    await transition(tx, {
      machine: exceptionMachine,
      table: bidException,
      column: bidException.state,
      columnName: 'state',
      id: row.id,
      from: row.state,
      event: input.decision,
      by: actor,
      companyId: request.companyId,
      set: {
        decidedBy: actor.userId,
        decidedAt: await businessNow(tx),
        reason: input.reason.trim(),
        refusalConfirmed: false,
      },
    });
    if (input.decision === 'refuse' && bid.state === 'submitted') {
      const after = await moveBid(tx, actor, bid, 'ask-confirmation');
      await mailExceptionRefused(tx, request, after, row.subject);
    }
  });
}
