import { and, asc, eq, gt, inArray, max, or, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { requireAccess } from '../access/index.ts';
import type { Database } from '../db/index.ts';
import { session, user } from '../db/schema/auth.ts';
import { company, membership } from '../db/schema/companies.ts';

const pageSize = 50;

/** People with their companies, by e-mail address; part of name or address narrows. */
export async function listUsers(db: Database, actor: Actor, filter: { q: string; after: string | null }) {
  requireAccess(actor, 'admin.view');
  const word = `%${filter.q.replace(/[\\%_]/g, (character) => `\\${character}`)}%`;
  const rows = await db
    .select({
      id: user.id,
      name: user.name,
      email: user.email,
      emailVerified: user.emailVerified,
      isAdmin: user.isAdmin,
      twoFactorEnabled: user.twoFactorEnabled,
      createdAt: user.createdAt,
    })
    .from(user)
    .where(
      and(
        ...(filter.after ? [gt(user.email, filter.after)] : []),
        ...(filter.q === ''
          ? []
          : [or(sql`${user.name} like ${word} escape '\\'`, sql`${user.email} like ${word} escape '\\'`)]),
      ),
    )
    .orderBy(asc(user.email))
    .limit(pageSize + 1);
  const shown = rows.slice(0, pageSize);
  const ids = shown.map((row) => row.id);
  const memberships =
    ids.length === 0
      ? []
      : await db
          .select({
            userId: membership.userId,
            companyId: company.id,
            companyName: company.name,
            kind: company.kind,
            roles: membership.roles,
            active: membership.active,
          })
          .from(membership)
          .innerJoin(company, eq(company.id, membership.companyId))
          .where(inArray(membership.userId, ids));
  const seen =
    ids.length === 0
      ? []
      : await db
          .select({ userId: session.userId, at: max(session.updatedAt) })
          .from(session)
          .where(inArray(session.userId, ids))
          .groupBy(session.userId);
  const items = shown.map((row) => ({
    ...row,
    twoFactorEnabled: row.twoFactorEnabled ?? false,
    createdAt: row.createdAt.getTime(),
    companies: memberships
      .filter((m) => m.userId === row.id)
      .map(({ companyId, companyName, kind, roles, active }) => ({
        companyId,
        companyName,
        kind,
        roles,
        active,
      })),
    lastSeenAt: seen.find((s) => s.userId === row.id)?.at?.getTime() ?? null,
  }));
  return { items, next: rows.length > pageSize ? (items.at(-1)?.email ?? null) : null };
}
