import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import {
  cleanFileName,
  fileKindFacts,
  fileNameMaxChars,
  filePurposeFacts,
  kindOfName,
  kindsText,
  singleUploadMaxBytes,
  uploadMaxBytes,
  uploadPartBytes,
  type FileKind,
  type FilePurpose,
} from '../../domain/files.ts';
import type { UploadSlot, UploadStart } from '../../schemas/api/files.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow, realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Database } from '../db/index.ts';
import { file } from '../db/schema/files.ts';
import { countAgainstLimit } from '../http/rate-limit.ts';
import { incomingKey } from './object-keys.ts';
import { objectStore, storing, type ObjectStore } from './store.ts';

/** An upload that is not finished by then is cleared away. */
const unfinishedMs = 24 * 3_600_000;
const startsPerHour = 300;

function checkedName(given: string, purpose: FilePurpose): { name: string; kind: FileKind } {
  const name = cleanFileName(given);
  const refuse = (message: string) =>
    new AppError('type-refused', { detail: message, fields: { file: message } });
  if (name.length > fileNameMaxChars) {
    throw refuse(`The name of the file is longer than ${fileNameMaxChars} characters.`);
  }
  const kind = kindOfName(name);
  if (!kind || !filePurposeFacts[purpose].kinds.includes(kind)) {
    throw refuse(`This takes ${kindsText(purpose)} files.`);
  }
  return { name, kind };
}

function checkSize(size: number): void {
  if (size === 0) {
    throw new AppError('invalid-input', {
      detail: 'The file is empty.',
      fields: { file: 'The file is empty.' },
    });
  }
  if (size > uploadMaxBytes) {
    const message = `Files may be ${uploadMaxBytes / 1024 / 1024} MB at most.`;
    throw new AppError('too-large', { detail: message, fields: { file: message } });
  }
}

/**
 * First step of an upload: a row that nobody sees yet, and a signed slot for one key, one verb, one type
 * and one length. Above 16 MB the file goes in parts of 8 MB whose slots are signed as they are needed.
 */
export async function startUpload(
  db: Database,
  actor: Actor,
  input: UploadStart,
  store: ObjectStore = objectStore(),
): Promise<UploadSlot> {
  requireAccess(actor, filePurposeFacts[input.purpose].upload, { companyId: input.companyId });
  requireVerifiedEmail(actor);
  const { name, kind } = checkedName(input.name, input.purpose);
  checkSize(input.size);
  await countAgainstLimit(db, `upload/${actor.userId}`, { count: startsPerHour, windowMs: 3_600_000 });

  const { contentType } = fileKindFacts[kind];
  const key = incomingKey(input.companyId);
  const id = newId();
  const inParts = input.size > singleUploadMaxBytes;
  const multipartId = inParts ? await storing(() => store.createMultipart({ key, contentType })) : null;
  await db.insert(file).values({
    id,
    ownerCompanyId: input.companyId,
    uploadedBy: actor.userId,
    purpose: input.purpose,
    name,
    contentType,
    size: input.size,
    incomingKey: key,
    multipartId,
    createdAt: await businessNow(db),
    expiresAt: realNow() + unfinishedMs,
  });
  if (inParts) {
    return {
      mode: 'parts',
      fileId: id,
      method: 'PUT',
      partBytes: uploadPartBytes,
      partCount: Math.ceil(input.size / uploadPartBytes),
    };
  }
  const slot = await store.presignPut({ key, contentType, sizeBytes: input.size });
  return { mode: 'single', fileId: id, method: 'PUT', url: slot.url, headers: slot.headers };
}
