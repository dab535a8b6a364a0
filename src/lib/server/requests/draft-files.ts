import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { requestFile } from '../db/schema/requests.ts';
import { requireCleanFile } from '../files/index.ts';
import { requestForUpdate } from './queries.ts';

const mostFiles = 30;

/** Adds a verified file of the buyer to a draft. */
export async function attachFile(
  db: Database,
  actor: Actor,
  input: { requestId: string; fileId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.edit', { companyId: row.companyId });
    if (row.state !== 'draft') {
      throw new AppError('state-conflict', { detail: 'Files are added while the request is a draft.' });
    }
    const file = await requireCleanFile(tx, input.fileId, {
      ownerCompanyId: row.companyId,
      purpose: ['request-sketch', 'part-drawing'],
    });
    const there = await tx
      .select({ fileId: requestFile.fileId })
      .from(requestFile)
      .where(eq(requestFile.requestId, row.id));
    if (there.length >= mostFiles) {
      throw new AppError('limit-exceeded', { detail: `A request takes at most ${mostFiles} files.` });
    }
    await tx
      .insert(requestFile)
      .values({
        requestId: row.id,
        fileId: file.id,
        kind: file.purpose === 'part-drawing' ? 'part-drawing' : 'request-sketch',
        addedAt: await businessNow(tx),
      })
      .onConflictDoNothing();
    await audit(tx, actor, {
      action: 'request.attach-file',
      subjectType: 'request',
      subjectId: row.id,
      companyId: row.companyId,
      detail: { fileId: file.id },
    });
  });
}

/** Takes a file off a draft; the file itself stays with the company. */
export async function detachFile(
  db: Database,
  actor: Actor,
  input: { requestId: string; fileId: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.edit', { companyId: row.companyId });
    if (row.state !== 'draft') {
      throw new AppError('state-conflict', { detail: 'Files are taken off while the request is a draft.' });
    }
    await tx
      .delete(requestFile)
      .where(and(eq(requestFile.requestId, row.id), eq(requestFile.fileId, input.fileId)));
  });
}
