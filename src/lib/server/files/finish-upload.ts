import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import {
  fileKindFacts,
  fileMachine,
  filePurposeFacts,
  kindOfName,
  uploadPartBytes,
} from '../../domain/files.ts';
import type { uploadFinish, UploadState } from '../../schemas/api/files.ts';
import type { z } from 'zod';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { ObjectStoreError } from '../adapters/object-store.ts';
import { transact, type Database } from '../db/index.ts';
import { transition } from '../db/transition.ts';
import { file } from '../db/schema/files.ts';
import { fileRow, type FileRow } from './access.ts';
import { contentIs } from './content-checks.ts';
import { inspectContent } from './inspect-content.ts';
import { objectKey } from './object-keys.ts';
import { objectStore, storing, type ObjectStore } from './store.ts';

type Finish = z.output<typeof uploadFinish>;

/** What anyone who may upload is told of an upload. */
export function uploadStateOf(row: FileRow): UploadState {
  const { id, name, size, contentType, state, sha256, refusedReason } = row;
  return { id, name, size, contentType, state, sha256, refusedReason };
}

/** Puts the parts together; done already (an answer that was lost) is done. */
async function joinParts(store: ObjectStore, row: FileRow, parts: Finish['parts']): Promise<void> {
  if (row.multipartId === null) return;
  if ((await store.head(row.incomingKey)) !== undefined) return;
  const count = Math.ceil(row.size / uploadPartBytes);
  const byNumber = new Map(parts.map((part) => [part.number, part]));
  const ordered = Array.from({ length: count }, (_, index) => byNumber.get(index + 1));
  const missing = ordered.flatMap((part, index) => (part ? [] : [index + 1]));
  const tell = (detail: string) => new AppError('state-conflict', { detail, data: { missing } });
  if (missing.length > 0) throw tell('Some parts of the file have not arrived yet.');
  try {
    await store.completeMultipart({
      key: row.incomingKey,
      uploadId: row.multipartId,
      parts: ordered.flatMap((part) => (part ? [{ partNumber: part.number, etag: part.etag }] : [])),
    });
  } catch (error) {
    if (!(error instanceof ObjectStoreError) || error.kind === 'unavailable') throw error;
    throw tell('The file store does not have every part. Please send the file again.');
  }
}

type Verdict = { sha256: string; storageKey: string } | { reason: string };

/**
 * Copies what arrived to a key that no slot was ever signed for, and judges the copy: what is judged
 * clean cannot be exchanged afterwards by whoever still holds a slot.
 */
async function judge(store: ObjectStore, row: FileRow, at: number): Promise<Verdict> {
  const arrived = (await store.head(row.incomingKey))?.sizeBytes;
  if (arrived === undefined) {
    throw new AppError('state-conflict', { detail: 'The file has not arrived at the store yet.' });
  }
  if (arrived !== row.size) {
    return { reason: `It was announced with ${row.size} bytes and arrived with ${arrived}.` };
  }
  const storageKey = objectKey(row.ownerCompanyId, at);
  await store.copy({ from: row.incomingKey, to: storageKey, contentType: row.contentType });
  const found = await inspectContent(await store.getStream(storageKey), row.size);
  const kind = kindOfName(row.name);
  const fits = kind !== undefined && found.size === row.size && (await contentIs(kind, found));
  if (fits) return { sha256: found.sha256, storageKey };
  await store.remove(storageKey);
  const label = kind ? fileKindFacts[kind].label : 'known';
  return { reason: `The name says ${label}, but the content is no ${label} file, or it is damaged.` };
}

/**
 * Second step of an upload: the server reads what arrived, checks length, content against the extension,
 * and computes SHA-256. Clean files can be used; what is refused is deleted from the store. Asked again,
 * it answers with what was found.
 */
export async function finishUpload(
  db: Database,
  actor: Actor,
  fileId: string,
  input: Finish = { parts: [] },
  store: ObjectStore = objectStore(),
): Promise<UploadState> {
  const row = await fileRow(db, fileId);
  requireAccess(actor, filePurposeFacts[row.purpose].upload, { companyId: row.ownerCompanyId });
  if (row.state !== 'pending') return uploadStateOf(row);
  const at = await businessNow(db);
  const verdict = await storing(async () => {
    await joinParts(store, row, input.parts);
    return judge(store, row, at);
  });
  try {
    await transact(db, (tx) =>
      transition(tx, {
        machine: fileMachine,
        table: file,
        column: file.state,
        columnName: 'state',
        id: row.id,
        from: 'pending',
        event: 'reason' in verdict ? 'refuse' : 'pass',
        by: actor,
        companyId: row.ownerCompanyId,
        set: {
          verifiedAt: at,
          multipartId: null,
          ...('reason' in verdict ? { refusedReason: verdict.reason } : verdict),
        },
        detail: {
          name: row.name,
          purpose: row.purpose,
          size: row.size,
          ...('reason' in verdict ? { reason: verdict.reason } : { sha256: verdict.sha256 }),
        },
      }),
    );
  } catch (error) {
    // Somebody else finished or cancelled it meanwhile: this copy is one too many.
    if (!(error instanceof AppError) || error.code !== 'version-conflict') throw error;
    if ('storageKey' in verdict) await storing(() => store.remove(verdict.storageKey));
    return uploadStateOf(await fileRow(db, fileId));
  }
  await storing(() => store.remove(row.incomingKey));
  return uploadStateOf(await fileRow(db, fileId));
}

/** How an upload stands, for a browser that comes back to it. */
export async function uploadState(db: Database, actor: Actor, fileId: string): Promise<UploadState> {
  const row = await fileRow(db, fileId);
  requireAccess(actor, filePurposeFacts[row.purpose].upload, { companyId: row.ownerCompanyId });
  return uploadStateOf(row);
}
