import type { Actor } from './actor.ts';
import type { Permission } from './permissions.ts';
import type { CompanyKind, Role } from './roles.ts';

/** What an act is about: the companies that it belongs to. Missing ids grant nothing. */
export interface AccessObject {
  /** The one company it belongs to (company, machine, request, bid of a fabricator …). */
  companyId?: string | null;
  /** Orders and what hangs on them have two. */
  buyerCompanyId?: string | null;
  fabricatorCompanyId?: string | null;
  /** A second approver must be another person than the first. */
  notUserId?: string | null;
}

function has(
  actor: Actor,
  companyId: string | null | undefined,
  kind: CompanyKind | 'any',
  roles: readonly Role[] | 'any',
  options: { verified?: boolean } = {},
): boolean {
  if (!companyId) return false;
  return actor.memberships.some(
    (m) =>
      m.companyId === companyId &&
      (kind === 'any' || m.kind === kind) &&
      (roles === 'any' || m.roles.some((role) => roles.includes(role))) &&
      (!options.verified || m.verified),
  );
}

/**
 * The whole policy: default deny, one case per permission. Pure, so that buttons ask the same question
 * as the server. Being allowed is not enough: the state of the object is checked by its own rules.
 */
export function can(actor: Actor | null, permission: Permission, object: AccessObject = {}): boolean {
  if (!actor) return false;
  const buyer = object.buyerCompanyId ?? object.companyId;
  const fabricator = object.fabricatorCompanyId ?? object.companyId;
  switch (permission) {
    case 'company.view':
      return has(actor, object.companyId, 'any', 'any') || actor.isAdmin;
    case 'company.edit':
    case 'company.members':
      return has(actor, object.companyId, 'any', ['owner']);
    case 'company.payouts':
      return has(actor, object.companyId, 'fabricator', ['owner']);
    case 'company.documents':
      return has(actor, object.companyId, 'any', ['owner', 'engineer', 'purchaser', 'estimator', 'builder']);
    case 'verification.ask':
      return has(actor, object.companyId, 'fabricator', ['owner']);
    case 'directory.view':
      return actor.memberships.length > 0 || actor.isAdmin;

    case 'machine.view':
    case 'request.view-own':
    case 'coil.view':
      return has(actor, object.companyId, 'buyer', 'any');
    case 'machine.edit':
    case 'request.edit':
    case 'request.post':
      return has(actor, object.companyId, 'buyer', ['owner', 'engineer']);
    case 'request.withdraw':
    case 'question.answer':
    case 'bid.compare':
      return has(actor, object.companyId, 'buyer', ['owner', 'engineer', 'purchaser']);
    case 'award.make':
      return has(actor, object.companyId, 'buyer', ['owner', 'purchaser']);
    case 'award.approve':
      return (
        has(actor, object.companyId, 'buyer', ['owner', 'purchaser']) && object.notUserId !== actor.userId
      );
    case 'coil.ask-repair':
      return has(actor, object.companyId, 'buyer', 'any');

    case 'board.view':
      return (
        actor.memberships.some((m) => m.kind === 'fabricator' && m.verified) &&
        (!object.companyId || has(actor, object.companyId, 'fabricator', 'any', { verified: true }))
      );
    case 'question.ask':
    case 'bid.edit':
      return has(actor, object.companyId, 'fabricator', ['owner', 'estimator'], { verified: true });
    case 'bid.view-own':
      return has(actor, object.companyId, 'fabricator', 'any');

    case 'order.view':
    case 'order.message':
      return has(actor, buyer, 'buyer', 'any') || has(actor, fabricator, 'fabricator', 'any');
    case 'order.dispute':
    case 'order.end':
      return (
        has(actor, buyer, 'buyer', ['owner', 'purchaser']) || has(actor, fabricator, 'fabricator', ['owner'])
      );
    case 'change.propose':
      return (
        has(actor, buyer, 'buyer', ['owner', 'engineer', 'purchaser']) ||
        has(actor, fabricator, 'fabricator', ['owner', 'estimator'])
      );

    case 'milestone.fund':
    case 'milestone.release':
      return has(actor, buyer, 'buyer', ['owner', 'purchaser']);
    case 'drawing.judge':
    case 'record.judge':
      return has(actor, buyer, 'buyer', ['owner', 'engineer']);
    case 'receipt.confirm':
    case 'running-record.enter':
      return has(actor, buyer, 'buyer', 'any');

    case 'order.acknowledge':
      return has(actor, fabricator, 'fabricator', ['owner', 'estimator']);
    case 'drawing.submit':
    case 'record.enter':
    case 'order.ship':
      return has(actor, fabricator, 'fabricator', ['owner', 'builder']);

    case 'admin.view':
    case 'admin.verify':
    case 'admin.decide-dispute':
    case 'admin.operate':
      return actor.isAdmin;

    default: {
      // A permission without a case does not compile; should one arrive at run time, it is denied.
      const forgotten: never = permission;
      void forgotten;
      return false;
    }
  }
}
