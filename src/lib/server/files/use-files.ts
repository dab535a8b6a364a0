import { and, eq, inArray } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import type { FilePurpose } from '../../domain/files.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader, Tx } from '../db/index.ts';
import { file, fileAudience } from '../db/schema/files.ts';

export interface FileFacts {
  id: string;
  name: string;
  contentType: string;
  size: number;
  sha256: string;
  purpose: FilePurpose;
  createdAt: number;
}

/**
 * For a domain that hangs a file on something of its own: the file must be clean, belong to the company
 * and have been uploaded for this purpose; anything else is told at the field `file`.
 */
export async function requireCleanFile(
  tx: Reader,
  fileId: string,
  expected: { ownerCompanyId: string; purpose: FilePurpose | readonly FilePurpose[] },
): Promise<FileFacts> {
  const purposes = typeof expected.purpose === 'string' ? [expected.purpose] : expected.purpose;
  const [row] = await unsafeFileFacts(tx, [fileId], {
    ownerCompanyId: expected.ownerCompanyId,
    purposes,
  });
  if (row) return row;
  const message = 'This file is not there or not verified. Please upload it again.';
  throw new AppError('invalid-input', { detail: message, fields: { file: message } });
}

/** Name, size and hash of clean files, for callers who have authorised what the files hang on. */
export async function unsafeFileFacts(
  reader: Reader,
  fileIds: readonly string[],
  within?: { ownerCompanyId: string; purposes: readonly FilePurpose[] },
): Promise<FileFacts[]> {
  if (fileIds.length === 0) return [];
  const rows = await reader
    .select({
      id: file.id,
      name: file.name,
      contentType: file.contentType,
      size: file.size,
      sha256: file.sha256,
      purpose: file.purpose,
      createdAt: file.createdAt,
    })
    .from(file)
    .where(
      and(
        inArray(file.id, [...fileIds]),
        eq(file.state, 'clean'),
        ...(within
          ? [eq(file.ownerCompanyId, within.ownerCompanyId), inArray(file.purpose, [...within.purposes])]
          : []),
      ),
    )
    .orderBy(file.id);
  return rows.flatMap((row) => (row.sha256 === null ? [] : [{ ...row, sha256: row.sha256 }]));
}

/** Lets other companies read a file (parties of an order, bidders under terms). */
export async function shareFile(tx: Tx, fileId: string, companyIds: readonly string[]): Promise<void> {
  if (companyIds.length === 0) return;
  const grantedAt = await businessNow(tx);
  await tx
    .insert(fileAudience)
    .values(companyIds.map((companyId) => ({ fileId, companyId, grantedAt })))
    .onConflictDoNothing();
}

/** Lets every verified fabricator read a file: sketches and drawings of an open request. */
export async function openFileToVerified(tx: Tx, fileId: string): Promise<void> {
  await tx.update(file).set({ openToVerified: true }).where(eq(file.id, fileId));
}

/** Ends that again: the request is withdrawn, or drawings are given to bidders only. */
export async function closeFileToVerified(tx: Tx, fileId: string): Promise<void> {
  await tx.update(file).set({ openToVerified: false }).where(eq(file.id, fileId));
}
