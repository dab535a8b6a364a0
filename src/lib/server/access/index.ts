import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { Permission } from '../../domain/permissions.ts';
import { can, type AccessObject } from '../../domain/policy.ts';
import { config } from '../config/index.ts';

export { can };
export type { AccessObject };

function isParty(actor: Actor, object: AccessObject): boolean {
  const ids = [object.companyId, object.buyerCompanyId, object.fabricatorCompanyId];
  return actor.memberships.some((m) => ids.includes(m.companyId));
}

/**
 * The guard of every use-case. What belongs to others is "not found", so that its existence is not
 * told; a member whose role is too small is told so.
 */
export function requireAccess(
  actor: Actor | null,
  permission: Permission,
  object: AccessObject = {},
): asserts actor is Actor {
  if (!actor) throw new AppError('sign-in-needed');
  if (can(actor, permission, object)) return;
  if (permission === 'board.view' || isParty(actor, object)) {
    const unverified = actor.memberships.find((m) => m.kind === 'fabricator' && !m.verified);
    if (unverified && ['board.view', 'question.ask', 'bid.edit'].includes(permission)) {
      throw new AppError('company-not-verified');
    }
    throw new AppError('not-allowed');
  }
  throw new AppError('not-found');
}

/** Posting, bidding, accepting and money need a confirmed e-mail address. */
export function requireVerifiedEmail(actor: Actor): void {
  if (!actor.emailVerified) throw new AppError('email-not-verified');
}

/** Payouts and roles: in production the person must have set up a second factor. */
export function requireSecondFactor(actor: Actor): void {
  if (config().mode === 'production' && !actor.twoFactor) throw new AppError('two-factor-needed');
}
