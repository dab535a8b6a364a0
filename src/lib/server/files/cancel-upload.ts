import { and, eq, lte } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { fileMachine, filePurposeFacts } from '../../domain/files.ts';
import { requireAccess } from '../access/index.ts';
import { realNow } from '../adapters/clock.ts';
import { ObjectStoreError } from '../adapters/object-store.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { file } from '../db/schema/files.ts';
import { transition } from '../db/transition.ts';
import { fileRow, type FileRow } from './access.ts';
import { objectStore, storing, type ObjectStore } from './store.ts';

/** Parts that are joined or given up already are no error. */
async function abortParts(store: ObjectStore, key: string, uploadId: string): Promise<void> {
  try {
    await store.abortMultipart({ key, uploadId });
  } catch (error) {
    if (!(error instanceof ObjectStoreError) || error.kind !== 'missing') throw error;
  }
}

async function giveUp(
  db: Database,
  by: By,
  row: FileRow,
  event: 'cancel' | 'expire',
  store: ObjectStore,
): Promise<void> {
  await storing(async () => {
    if (row.multipartId !== null) await abortParts(store, row.incomingKey, row.multipartId);
    await store.remove(row.incomingKey);
  });
  await transact(db, (tx) =>
    transition(tx, {
      machine: fileMachine,
      table: file,
      column: file.state,
      columnName: 'state',
      id: row.id,
      from: 'pending',
      event,
      by,
      companyId: row.ownerCompanyId,
      set: {
        multipartId: null,
        refusedReason: event === 'cancel' ? 'The upload was cancelled.' : 'The upload was never finished.',
      },
      detail: { name: row.name, purpose: row.purpose },
    }),
  );
}

/** Gives an upload up before it is finished; what arrived is deleted. */
export async function cancelUpload(
  db: Database,
  actor: Actor,
  fileId: string,
  store: ObjectStore = objectStore(),
): Promise<void> {
  const row = await fileRow(db, fileId);
  requireAccess(actor, filePurposeFacts[row.purpose].upload, { companyId: row.ownerCompanyId });
  if (row.state === 'refused') return;
  if (row.state === 'clean')
    throw new AppError('state-conflict', { detail: 'The upload is finished already.' });
  await giveUp(db, actor, row, 'cancel', store);
}

/** Clears uploads that were begun a day ago and never finished. Repeated by the worker. */
export async function clearUnfinishedUploads(
  db: Database,
  signal: AbortSignal,
  store: ObjectStore = objectStore(),
): Promise<number> {
  const rows = await db
    .select()
    .from(file)
    .where(and(eq(file.state, 'pending'), lte(file.expiresAt, realNow())))
    .limit(50);
  let cleared = 0;
  for (const row of rows) {
    if (signal.aborted) break;
    try {
      await giveUp(db, 'system', row, 'expire', store);
      cleared += 1;
    } catch (error) {
      // Finished in this very moment, which is better than cleared.
      if (!(error instanceof AppError) || error.code !== 'version-conflict') throw error;
    }
  }
  return cleared;
}
