import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { filePurposeFacts, type FilePurpose } from '../../domain/files.ts';
import { can } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { companyDocument, file, fileAudience } from '../db/schema/files.ts';
import { verificationDocument } from '../db/schema/verification.ts';

export type FileRow = typeof file.$inferSelect;

export async function fileRow(reader: Reader, fileId: string): Promise<FileRow> {
  const [row] = await reader.select().from(file).where(eq(file.id, fileId));
  if (!row) throw new AppError('not-found');
  return row;
}

/** What a member of the owning company needs to read a file of this purpose. */
function ownRead(actor: Actor, purpose: FilePurpose, companyId: string): boolean {
  return can(actor, purpose === 'company-document' ? 'company.documents' : 'company.view', { companyId });
}

/** Papers of a company are its own until it names them when it asks to be verified. */
async function shownForVerification(reader: Reader, fileId: string): Promise<boolean> {
  const [named] = await reader
    .select({ caseId: verificationDocument.caseId })
    .from(verificationDocument)
    .innerJoin(companyDocument, eq(companyDocument.id, verificationDocument.documentId))
    .where(eq(companyDocument.fileId, fileId))
    .limit(1);
  return named !== undefined;
}

/** Who may read: the owner, the companies it was shared with, verified fabricators where it is open, admins by purpose. */
export async function mayRead(
  reader: Reader,
  actor: Actor,
  row: FileRow,
): Promise<'member' | 'admin' | null> {
  const isMember = actor.memberships.some((m) => m.companyId === row.ownerCompanyId);
  if (isMember && ownRead(actor, row.purpose, row.ownerCompanyId)) return 'member';
  if (row.openToVerified && can(actor, 'board.view')) return 'member';
  for (const { companyId } of actor.memberships) {
    const [granted] = await reader
      .select({ companyId: fileAudience.companyId })
      .from(fileAudience)
      .where(and(eq(fileAudience.fileId, row.id), eq(fileAudience.companyId, companyId)));
    if (granted) return 'member';
  }
  const admin = filePurposeFacts[row.purpose].adminRead;
  if (!admin || !can(actor, admin)) return null;
  if (row.purpose === 'company-document' && !(await shownForVerification(reader, row.id))) return null;
  return 'admin';
}
