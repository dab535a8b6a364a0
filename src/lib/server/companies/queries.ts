import { and, asc, eq, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { can, requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company, companyAddress, invitation, membership } from '../db/schema/companies.ts';
import { profileOf } from './update-company.ts';

/** The page of a company for its members (and admins): what it is, who belongs to it, where it is. */
export async function companyPage(reader: Reader, actor: Actor, companyId: string) {
  requireAccess(actor, 'company.view', { companyId });
  const [row] = await reader.select().from(company).where(eq(company.id, companyId));
  if (!row) throw new AppError('not-found');
  const now = await businessNow(reader);
  const members = await reader
    .select({
      id: membership.id,
      userId: membership.userId,
      name: user.name,
      email: user.email,
      roles: membership.roles,
      since: membership.createdAt,
      version: membership.version,
    })
    .from(membership)
    .innerJoin(user, eq(user.id, membership.userId))
    .where(and(eq(membership.companyId, companyId), eq(membership.active, true)))
    .orderBy(asc(membership.createdAt), asc(membership.id));
  const invitations = can(actor, 'company.members', { companyId })
    ? await reader
        .select({
          id: invitation.id,
          email: invitation.email,
          roles: invitation.roles,
          expiresAt: invitation.expiresAt,
          version: invitation.version,
        })
        .from(invitation)
        .where(and(eq(invitation.companyId, companyId), eq(invitation.state, 'open')))
        .orderBy(asc(invitation.createdAt))
    : [];
  const addresses = await reader
    .select({
      id: companyAddress.id,
      purpose: companyAddress.purpose,
      address: companyAddress.address,
      version: companyAddress.version,
    })
    .from(companyAddress)
    .where(and(eq(companyAddress.companyId, companyId), isNull(companyAddress.archivedAt)))
    .orderBy(asc(companyAddress.purpose), asc(companyAddress.id));
  return {
    id: row.id,
    kind: row.kind,
    currency: row.currency,
    createdAt: row.createdAt,
    verifiedUntil: row.verifiedUntil,
    verified: row.kind === 'buyer' || (row.verifiedUntil ?? 0) > now,
    ...profileOf(row),
    members: members.map((m) => ({ ...m, oneself: m.userId === actor.userId })),
    invitations: invitations.map((i) => ({ ...i, expired: i.expiresAt <= now })),
    addresses,
  };
}
export type CompanyPage = Awaited<ReturnType<typeof companyPage>>;
