import { and, asc, desc, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { addDays, dateIn } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { can, requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Database, Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company } from '../db/schema/companies.ts';
import { companyDocument, file } from '../db/schema/files.ts';
import { fabricatorProfile, verificationCase, verificationDocument } from '../db/schema/verification.ts';

export type CaseRow = typeof verificationCase.$inferSelect;

export async function caseRow(reader: Reader, caseId: string): Promise<CaseRow> {
  const [row] = await reader.select().from(verificationCase).where(eq(verificationCase.id, caseId));
  if (!row) throw new AppError('not-found');
  return row;
}

/** Papers named in a case; archived ones too, for they were shown then. */
async function documentsOf(reader: Reader, caseId: string) {
  return reader
    .select({
      id: companyDocument.id,
      fileId: companyDocument.fileId,
      fileName: file.name,
      size: file.size,
      sha256: file.sha256,
      kind: companyDocument.kind,
      title: companyDocument.title,
      addedAt: companyDocument.addedAt,
    })
    .from(verificationDocument)
    .innerJoin(companyDocument, eq(companyDocument.id, verificationDocument.documentId))
    .innerJoin(file, eq(file.id, companyDocument.fileId))
    .where(eq(verificationDocument.caseId, caseId))
    .orderBy(asc(companyDocument.id));
}

/** The cases of a company, newest first, without who decided: admins stay unnamed to companies. */
async function historyOf(reader: Reader, companyId: string) {
  return reader
    .select({
      id: verificationCase.id,
      state: verificationCase.state,
      askedAt: verificationCase.askedAt,
      decidedAt: verificationCase.decidedAt,
      verifiedItems: verificationCase.verifiedItems,
      verifiedUntil: verificationCase.verifiedUntil,
      reasons: verificationCase.reasons,
      version: verificationCase.version,
    })
    .from(verificationCase)
    .where(eq(verificationCase.companyId, companyId))
    .orderBy(desc(verificationCase.askedAt), desc(verificationCase.id))
    .limit(20);
}

/** Where a fabricator stands with its verification, and what it declared last. */
export async function companyVerification(db: Database, actor: Actor, companyId: string) {
  requireAccess(actor, 'company.view', { companyId });
  const [row] = await db
    .select({
      id: company.id,
      name: company.name,
      kind: company.kind,
      timeZone: company.timeZone,
      verifiedUntil: company.verifiedUntil,
    })
    .from(company)
    .where(eq(company.id, companyId));
  if (!row || row.kind !== 'fabricator') throw new AppError('not-found');
  const now = await businessNow(db);
  const [profile] = await db
    .select()
    .from(fabricatorProfile)
    .where(eq(fabricatorProfile.companyId, companyId));
  const history = await historyOf(db, companyId);
  const open = history.find((item) => item.state === 'asked');
  return {
    // A date that has passed verifies nothing any more.
    company: { ...row, verifiedUntil: (row.verifiedUntil ?? 0) > now ? row.verifiedUntil : null },
    profile: profile ?? null,
    history,
    openDocuments: open ? await documentsOf(db, open.id) : [],
    mayAsk: can(actor, 'verification.ask', { companyId }),
  };
}

/** Cases for admins: those that wait, oldest first; or the decided ones, newest first. */
export async function verificationQueue(db: Database, actor: Actor, which: 'waiting' | 'decided') {
  requireAccess(actor, 'admin.verify');
  const waiting = which === 'waiting';
  return db
    .select({
      id: verificationCase.id,
      companyId: verificationCase.companyId,
      companyName: company.name,
      state: verificationCase.state,
      askedAt: verificationCase.askedAt,
      decidedAt: verificationCase.decidedAt,
      verifiedUntil: verificationCase.verifiedUntil,
      country: verificationCase.worksAddress,
    })
    .from(verificationCase)
    .innerJoin(company, eq(company.id, verificationCase.companyId))
    .where(
      inArray(verificationCase.state, waiting ? ['asked'] : ['verified', 'refused', 'withdrawn', 'revoked']),
    )
    .orderBy(waiting ? asc(verificationCase.askedAt) : desc(verificationCase.decidedAt))
    .limit(100)
    .then((rows) => rows.map(({ country, ...row }) => ({ ...row, country: country.country })));
}

/** One case with everything an admin decides on. */
export async function verificationCaseFor(db: Database, actor: Actor, caseId: string) {
  requireAccess(actor, 'admin.verify');
  const row = await caseRow(db, caseId);
  const [about] = await db
    .select({
      id: company.id,
      name: company.name,
      taxNumber: company.taxNumber,
      website: company.website,
      timeZone: company.timeZone,
      verifiedUntil: company.verifiedUntil,
      createdAt: company.createdAt,
    })
    .from(company)
    .where(eq(company.id, row.companyId));
  if (!about) throw new AppError('not-found');
  const people = await db
    .select({ id: user.id, name: user.name })
    .from(user)
    .where(inArray(user.id, [row.askedBy, ...(row.decidedBy ? [row.decidedBy] : [])]));
  const nameOf = (id: string | null) => people.find((person) => person.id === id)?.name ?? null;
  const others = await historyOf(db, row.companyId);
  return {
    case: row,
    company: about,
    askedBy: nameOf(row.askedBy),
    decidedBy: nameOf(row.decidedBy),
    documents: await documentsOf(db, caseId),
    earlier: others.filter((other) => other.id !== row.id),
    /** A year from now in the zone of the fabricator. */
    suggestedDate: addDays(dateIn(about.timeZone, await businessNow(db)), 365),
  };
}

/** The newest case that still stands as verified; null when there is none. */
export async function standingCase(reader: Reader, companyId: string): Promise<CaseRow | null> {
  const [row] = await reader
    .select()
    .from(verificationCase)
    .where(and(eq(verificationCase.companyId, companyId), eq(verificationCase.state, 'verified')))
    .orderBy(desc(verificationCase.decidedAt), desc(verificationCase.id))
    .limit(1);
  return row ?? null;
}
