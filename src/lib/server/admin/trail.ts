import { and, desc, eq, inArray, lt, ne } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { requireAccess } from '../access/index.ts';
import { verifyAudit, type AuditVerdict } from '../audit/seals.ts';
import type { Database } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company } from '../db/schema/companies.ts';
import { auditEvent } from '../db/schema/platform.ts';

const pageSize = 50;

export interface TrailFilter {
  subjectType: string | null;
  subjectId: string | null;
  companyId: string | null;
  after: string | null;
}

/** The audit trail, newest first, by what it is about and by company. */
export async function listAuditTrail(db: Database, actor: Actor, filter: TrailFilter) {
  requireAccess(actor, 'admin.view');
  const rows = await db
    .select()
    .from(auditEvent)
    .where(
      and(
        ...(filter.subjectType ? [eq(auditEvent.subjectType, filter.subjectType)] : []),
        ...(filter.subjectId ? [eq(auditEvent.subjectId, filter.subjectId)] : []),
        ...(filter.companyId ? [eq(auditEvent.companyId, filter.companyId)] : []),
        ...(filter.after ? [lt(auditEvent.id, filter.after)] : []),
      ),
    )
    .orderBy(desc(auditEvent.id))
    .limit(pageSize + 1);
  const shown = rows.slice(0, pageSize);
  const idsOf = (pick: (row: (typeof shown)[number]) => string | null) => [
    ...new Set(shown.map(pick).filter((id) => id !== null)),
  ];
  const userIds = idsOf((row) => row.actorUserId);
  const companyIds = idsOf((row) => row.companyId);
  const people =
    userIds.length === 0
      ? []
      : await db.select({ id: user.id, name: user.name }).from(user).where(inArray(user.id, userIds));
  const companies =
    companyIds.length === 0
      ? []
      : await db
          .select({ id: company.id, name: company.name })
          .from(company)
          .where(inArray(company.id, companyIds));
  const items = shown.map((row) => ({
    id: row.id,
    at: row.at,
    actorKind: row.actorKind,
    actorName: people.find((person) => person.id === row.actorUserId)?.name ?? null,
    companyId: row.companyId,
    companyName: companies.find((c) => c.id === row.companyId)?.name ?? null,
    action: row.action,
    subjectType: row.subjectType,
    subjectId: row.subjectId,
    detail: JSON.stringify(row.detail),
    requestId: row.requestId,
    sealed: row.seal !== null,
  }));
  return { items, next: rows.length > pageSize ? (items.at(-1)?.id ?? null) : null };
}

/** Kinds of subject and companies that the filter offers. */
export async function trailFilterChoices(db: Database, actor: Actor) {
  requireAccess(actor, 'admin.view');
  const kinds = await db
    .selectDistinct({ subjectType: auditEvent.subjectType })
    .from(auditEvent)
    .where(ne(auditEvent.subjectType, ''))
    .orderBy(auditEvent.subjectType);
  const companies = await db
    .select({ id: company.id, name: company.name })
    .from(company)
    .orderBy(company.name)
    .limit(500);
  return { subjectTypes: kinds.map((row) => row.subjectType), companies };
}

/** Computes every seal again. */
export async function checkAuditTrail(db: Database, actor: Actor): Promise<AuditVerdict> {
  requireAccess(actor, 'admin.operate');
  return verifyAudit(db);
}
