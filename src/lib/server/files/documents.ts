import { and, desc, eq, isNull } from 'drizzle-orm';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { companyDocumentInput } from '../../schemas/forms/documents.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Reader } from '../db/index.ts';
import { companyDocument, file } from '../db/schema/files.ts';
import { requireCleanFile } from './use-files.ts';

export interface CompanyDocument {
  id: string;
  fileId: string;
  fileName: string;
  size: number;
  sha256: string | null;
  kind: (typeof companyDocument.$inferSelect)['kind'];
  title: string;
  addedAt: number;
  archivedAt: number | null;
  version: number;
}

const columns = {
  id: companyDocument.id,
  fileId: companyDocument.fileId,
  fileName: file.name,
  size: file.size,
  sha256: file.sha256,
  kind: companyDocument.kind,
  title: companyDocument.title,
  addedAt: companyDocument.addedAt,
  archivedAt: companyDocument.archivedAt,
  version: companyDocument.version,
};

/** For callers who have authorised: the papers of a company that are not archived, newest first. */
export async function unsafeCurrentDocuments(reader: Reader, companyId: string): Promise<CompanyDocument[]> {
  return reader
    .select(columns)
    .from(companyDocument)
    .innerJoin(file, eq(file.id, companyDocument.fileId))
    .where(and(eq(companyDocument.companyId, companyId), isNull(companyDocument.archivedAt)))
    .orderBy(desc(companyDocument.id));
}

/** The papers of one's company; archived ones too when asked for. */
export async function listCompanyDocuments(
  db: Database,
  actor: Actor,
  companyId: string,
  options: { archived?: boolean } = {},
): Promise<CompanyDocument[]> {
  requireAccess(actor, 'company.documents', { companyId });
  if (!options.archived) return unsafeCurrentDocuments(db, companyId);
  return db
    .select(columns)
    .from(companyDocument)
    .innerJoin(file, eq(file.id, companyDocument.fileId))
    .where(eq(companyDocument.companyId, companyId))
    .orderBy(desc(companyDocument.id));
}

/** Files an uploaded, verified file under the papers of a company. The same file twice is the same paper. */
export async function addCompanyDocument(
  db: Database,
  actor: Actor,
  companyId: string,
  input: z.output<typeof companyDocumentInput>,
): Promise<{ id: string }> {
  requireAccess(actor, 'company.documents', { companyId });
  requireVerifiedEmail(actor);
  return transact(db, async (tx) => {
    const facts = await requireCleanFile(tx, input.file, {
      ownerCompanyId: companyId,
      purpose: 'company-document',
    });
    const id = newId();
    const [row] = await tx
      .insert(companyDocument)
      .values({
        id,
        companyId,
        fileId: input.file,
        kind: input.kind,
        title: input.title,
        addedBy: actor.userId,
        addedAt: await businessNow(tx),
      })
      .onConflictDoNothing({ target: companyDocument.fileId })
      .returning({ id: companyDocument.id });
    if (!row) {
      const [there] = await tx
        .select({ id: companyDocument.id })
        .from(companyDocument)
        .where(eq(companyDocument.fileId, input.file));
      if (!there) throw new Error('the document was neither written nor found');
      return there;
    }
    await audit(tx, actor, {
      action: 'company-document.add',
      subjectType: 'company-document',
      subjectId: id,
      companyId,
      detail: { title: input.title, kind: input.kind, file: facts.name, sha256: facts.sha256 },
    });
    return row;
  });
}

/** Puts a paper aside. It stays for what named it before, and can still be read there. */
export async function archiveCompanyDocument(
  db: Database,
  actor: Actor,
  companyId: string,
  input: { documentId: string; version: number },
): Promise<void> {
  requireAccess(actor, 'company.documents', { companyId });
  await transact(db, async (tx) => {
    const [row] = await tx
      .select()
      .from(companyDocument)
      .where(and(eq(companyDocument.id, input.documentId), eq(companyDocument.companyId, companyId)));
    if (!row) throw new AppError('not-found');
    if (row.archivedAt !== null) return;
    if (row.version !== input.version) throw new AppError('version-conflict');
    await tx
      .update(companyDocument)
      .set({ archivedAt: await businessNow(tx), version: row.version + 1 })
      .where(eq(companyDocument.id, row.id));
    await audit(tx, actor, {
      action: 'company-document.archive',
      subjectType: 'company-document',
      subjectId: row.id,
      companyId,
      detail: { title: row.title },
    });
  });
}
