import { and, eq } from 'drizzle-orm';
import type { Actor, ActorMembership } from '../../domain/actor.ts';
import { businessNow } from '../adapters/clock.ts';
import { config } from '../config/index.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company, membership } from '../db/schema/companies.ts';

type UserRow = Pick<
  typeof user.$inferSelect,
  'id' | 'name' | 'email' | 'emailVerified' | 'isAdmin' | 'twoFactorEnabled' | 'timeZone' | 'unitSet'
>;

async function membershipsOf(reader: Reader, userId: string): Promise<ActorMembership[]> {
  const rows = await reader
    .select({
      companyId: company.id,
      companyName: company.name,
      kind: company.kind,
      verifiedUntil: company.verifiedUntil,
      roles: membership.roles,
    })
    .from(membership)
    .innerJoin(company, eq(company.id, membership.companyId))
    .where(and(eq(membership.userId, userId), eq(membership.active, true)))
    .orderBy(membership.createdAt, membership.id);
  if (rows.length === 0) return [];
  const now = await businessNow(reader);
  return rows.map(({ verifiedUntil, ...row }) => ({
    ...row,
    verified: row.kind === 'buyer' || (verifiedUntil ?? 0) > now,
  }));
}

/**
 * The actor of a person whose row is at hand. In production an admin without a second factor acts as
 * nobody in particular.
 */
export async function actorOfUser(reader: Reader, row: UserRow, requestId: string | null): Promise<Actor> {
  const twoFactor = row.twoFactorEnabled ?? false;
  return {
    userId: row.id,
    name: row.name,
    email: row.email,
    emailVerified: row.emailVerified,
    isAdmin: row.isAdmin && (twoFactor || config().mode !== 'production'),
    twoFactor,
    memberships: await membershipsOf(reader, row.id),
    timeZone: row.timeZone,
    unitSet: row.unitSet,
    requestId,
  };
}

/** The actor of a person by id, for commands, seeds and jobs that act in somebody's name. */
export async function loadActor(
  reader: Reader,
  userId: string,
  requestId: string | null = null,
): Promise<Actor> {
  const [row] = await reader.select().from(user).where(eq(user.id, userId));
  if (!row) throw new Error(`There is no user ${userId}.`);
  return actorOfUser(reader, row, requestId);
}
