import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { Role } from '../../domain/roles.ts';
import { requireAccess, requireSecondFactor } from '../access/index.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company, membership } from '../db/schema/companies.ts';
import { notify } from '../outbox/index.ts';
import { requireOwnerLeft, rolesFor, rolesInWords } from './rules.ts';

async function memberForUpdate(tx: Tx, input: { companyId: string; membershipId: string; version: number }) {
  const members = await tx
    .select({
      id: membership.id,
      userId: membership.userId,
      roles: membership.roles,
      version: membership.version,
    })
    .from(membership)
    .where(and(eq(membership.companyId, input.companyId), eq(membership.active, true)));
  const member = members.find((m) => m.id === input.membershipId);
  if (!member) throw new AppError('not-found');
  if (member.version !== input.version) {
    throw new AppError('version-conflict', { data: { roles: member.roles, version: member.version } });
  }
  const [about] = await tx
    .select({ companyName: company.name, kind: company.kind, email: user.email })
    .from(company)
    .innerJoin(user, eq(user.id, member.userId))
    .where(eq(company.id, input.companyId));
  if (!about) throw new AppError('not-found');
  return { ...member, ...about, members };
}

async function tell(
  tx: Tx,
  to: { userId: string; email: string },
  about: { companyId: string; kind: string; subject: string; text: string; href: string },
): Promise<void> {
  await notify(tx, [to], {
    kind: about.kind,
    subject: about.subject,
    content: {
      heading: about.subject,
      paragraphs: [about.text],
      action: { label: 'Open Coilyard', path: about.href },
    },
    about: { type: 'company', id: about.companyId },
    href: about.href,
  });
}

/** Gives a member another set of roles; the company keeps an owner. */
export async function changeRoles(
  db: Database,
  actor: Actor,
  input: { companyId: string; membershipId: string; roles: readonly Role[]; version: number },
): Promise<void> {
  requireAccess(actor, 'company.members', { companyId: input.companyId });
  requireSecondFactor(actor);
  await transact(db, async (tx) => {
    const member = await memberForUpdate(tx, input);
    const roles = rolesFor(member.kind, input.roles);
    requireOwnerLeft(member.members, member.id, roles);
    await tx
      .update(membership)
      .set({ roles, version: member.version + 1 })
      .where(eq(membership.id, member.id));
    await audit(tx, actor, {
      action: 'membership.change-roles',
      subjectType: 'membership',
      subjectId: member.id,
      companyId: input.companyId,
      detail: { userId: member.userId, from: member.roles, to: roles },
    });
    await tell(tx, member, {
      companyId: input.companyId,
      kind: 'roles-changed',
      subject: `Your part in ${member.companyName} has changed`,
      text: `${actor.name} set your roles: ${rolesInWords(roles)}.`,
      href: `/companies/${input.companyId}`,
    });
  });
}

/**
 * Takes a member out of the company: an owner anyone, everybody themself; never the last owner. What the
 * person did stays under their name; an invitation brings them back.
 */
export async function removeMember(
  db: Database,
  actor: Actor,
  input: { companyId: string; membershipId: string; version: number },
): Promise<void> {
  requireAccess(actor, 'company.view', { companyId: input.companyId });
  await transact(db, async (tx) => {
    const member = await memberForUpdate(tx, input);
    const oneself = member.userId === actor.userId;
    if (!oneself) {
      requireAccess(actor, 'company.members', { companyId: input.companyId });
      requireSecondFactor(actor);
    }
    requireOwnerLeft(member.members, member.id, []);
    await tx
      .update(membership)
      .set({ active: false, version: member.version + 1 })
      .where(eq(membership.id, member.id));
    await audit(tx, actor, {
      action: oneself ? 'membership.leave' : 'membership.remove',
      subjectType: 'membership',
      subjectId: member.id,
      companyId: input.companyId,
      detail: { userId: member.userId, roles: member.roles },
    });
    if (!oneself) {
      await tell(tx, member, {
        companyId: input.companyId,
        kind: 'member-removed',
        subject: `You are no longer a member of ${member.companyName}`,
        text: `${actor.name} took you out of the company. Its requests and orders are no longer open to you.`,
        href: '/desk',
      });
    }
  });
}
