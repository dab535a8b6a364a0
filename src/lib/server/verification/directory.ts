import { and, asc, eq, gt, like, or, sql } from 'drizzle-orm';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { directoryFilter } from '../../schemas/forms/verification.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Database } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { fabricatorProfile } from '../db/schema/verification.ts';
import { standingCase } from './read.ts';

const pageSize = 30;

/** `%` and `_` of what was typed are letters, not wildcards. */
function contains(text: string): string {
  return `%${text.replace(/[\\%_]/g, (character) => `\\${character}`)}%`;
}

/**
 * Verified fabricators by name, with what they declare. Filters: part of the name, town or statement, and
 * a shape they make. Only town and country of the address are given here.
 */
export async function listFabricators(db: Database, actor: Actor, filter: z.output<typeof directoryFilter>) {
  requireAccess(actor, 'directory.view');
  const now = await businessNow(db);
  const word = filter.q === '' ? null : contains(filter.q);
  const rows = await db
    .select({
      id: company.id,
      name: company.name,
      verifiedUntil: company.verifiedUntil,
      statement: fabricatorProfile.statement,
      capabilities: fabricatorProfile.capabilities,
      works: fabricatorProfile.worksAddress,
    })
    .from(company)
    .leftJoin(fabricatorProfile, eq(fabricatorProfile.companyId, company.id))
    .where(
      and(
        eq(company.kind, 'fabricator'),
        gt(company.verifiedUntil, now),
        ...(filter.after ? [gt(company.name, filter.after)] : []),
        ...(word
          ? [
              or(
                sql`${company.name} like ${word} escape '\\'`,
                sql`${fabricatorProfile.statement} like ${word} escape '\\'`,
                sql`json_extract(${fabricatorProfile.worksAddress}, '$.city') like ${word} escape '\\'`,
              ),
            ]
          : []),
        ...(filter.shape
          ? [like(sql`json_extract(${fabricatorProfile.capabilities}, '$.shapes')`, `%"${filter.shape}"%`)]
          : []),
      ),
    )
    .orderBy(asc(company.name))
    .limit(pageSize + 1);
  const items = rows.slice(0, pageSize).map(({ works, ...row }) => ({
    ...row,
    city: works?.city ?? null,
    country: works?.country ?? null,
  }));
  return { items, next: rows.length > pageSize ? (items.at(-1)?.name ?? null) : null };
}

/** A fabricator's page: what it declares, what exactly was verified, and until when. */
export async function fabricatorPage(db: Database, actor: Actor, companyId: string) {
  requireAccess(actor, 'directory.view');
  const [row] = await db
    .select({
      id: company.id,
      kind: company.kind,
      name: company.name,
      website: company.website,
      about: company.about,
      verifiedUntil: company.verifiedUntil,
      createdAt: company.createdAt,
    })
    .from(company)
    .where(eq(company.id, companyId));
  const own = actor.isAdmin || actor.memberships.some((m) => m.companyId === companyId);
  const verified = (row?.verifiedUntil ?? 0) > (await businessNow(db));
  // Not verified: a page for its own members only.
  if (!row || row.kind !== 'fabricator' || !(verified || own)) throw new AppError('not-found');
  const [profile] = await db
    .select({
      statement: fabricatorProfile.statement,
      capabilities: fabricatorProfile.capabilities,
      works: fabricatorProfile.worksAddress,
      updatedAt: fabricatorProfile.updatedAt,
    })
    .from(fabricatorProfile)
    .where(eq(fabricatorProfile.companyId, companyId));
  const standing = verified ? await standingCase(db, companyId) : null;
  return {
    company: { id: row.id, name: row.name, website: row.website, about: row.about, since: row.createdAt },
    verified,
    verifiedUntil: verified ? row.verifiedUntil : null,
    verifiedItems: standing?.verifiedItems ?? [],
    verifiedAt: standing?.decidedAt ?? null,
    profile: profile
      ? {
          statement: profile.statement,
          capabilities: profile.capabilities,
          city: profile.works.city,
          country: profile.works.country,
          updatedAt: profile.updatedAt,
        }
      : null,
  };
}
