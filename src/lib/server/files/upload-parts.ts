import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { filePurposeFacts, uploadPartBytes } from '../../domain/files.ts';
import type { uploadParts, UploadPartSlots } from '../../schemas/api/files.ts';
import { requireAccess } from '../access/index.ts';
import type { Database } from '../db/index.ts';
import { fileRow } from './access.ts';
import { objectStore, type ObjectStore } from './store.ts';

/** Signs slots for parts of an upload that is under way; asked for again when a slot ran out. */
export async function signUploadParts(
  db: Database,
  actor: Actor,
  fileId: string,
  input: z.output<typeof uploadParts>,
  store: ObjectStore = objectStore(),
): Promise<UploadPartSlots> {
  const row = await fileRow(db, fileId);
  requireAccess(actor, filePurposeFacts[row.purpose].upload, { companyId: row.ownerCompanyId });
  const { multipartId } = row;
  if (row.state !== 'pending' || multipartId === null) throw new AppError('state-conflict');
  const count = Math.ceil(row.size / uploadPartBytes);
  if (input.numbers.some((number) => number > count)) {
    throw new AppError('invalid-input', { fields: { numbers: `The file has ${count} parts.` } });
  }
  const items = await Promise.all(
    [...new Set(input.numbers)].map(async (number) => {
      const size = number < count ? uploadPartBytes : row.size - (count - 1) * uploadPartBytes;
      const { url, headers } = await store.presignPart({
        key: row.incomingKey,
        uploadId: multipartId,
        partNumber: number,
        sizeBytes: size,
      });
      return { number, url, headers };
    }),
  );
  return { items };
}
