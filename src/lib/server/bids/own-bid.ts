import type { Actor } from '../../domain/actor.ts';
import { can, requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { bidOf, bidsOfCompany, exceptionsOf, filesOf } from './queries.ts';

/** The bid of one's own company for a request, or null where there is none. */
export async function ownBid(reader: Reader, actor: Actor | null, requestId: string, companyId: string) {
  requireAccess(actor, 'bid.view-own', { companyId });
  const row = await bidOf(reader, requestId, companyId);
  if (!row) return null;
  const exceptions = await exceptionsOf(reader, [row.id]);
  const files = await filesOf(reader, [row.id]);
  return {
    ...row,
    exceptions: exceptions.map(({ id, subject, text, state, reason, refusalConfirmed }) => ({
      id,
      subject,
      text,
      state,
      reason,
      refusalConfirmed,
    })),
    files: files.map(({ id, name, size }) => ({ id, name, size })),
  };
}
export type OwnBid = NonNullable<Awaited<ReturnType<typeof ownBid>>>;

/** The bids of all fabricator companies the actor belongs to, newest first. */
export async function myBids(reader: Reader, actor: Actor) {
  const companyIds = actor.memberships
    .filter((m) => can(actor, 'bid.view-own', { companyId: m.companyId }))
    .map((m) => m.companyId);
  return bidsOfCompany(reader, companyIds);
}
