import { z } from 'zod';
import { filePurposes, uploadMaxBytes, uploadPartBytes } from '../../domain/files.ts';

/** What a browser says of a file before it sends it; all of it is checked again on what arrived. */
export const uploadStart = z.object({
  companyId: z.uuid(),
  purpose: z.enum(filePurposes),
  name: z.string().min(1, 'The file needs a name.').max(400, 'The name of the file is too long.'),
  /** What the browser believes; the type that counts follows from the checked extension. */
  contentType: z.string().max(200).default(''),
  size: z.number().int('The size is a whole number of bytes.').min(0),
});
export type UploadStart = z.input<typeof uploadStart>;

const maxParts = Math.ceil(uploadMaxBytes / uploadPartBytes);

export const uploadParts = z.object({
  numbers: z.array(z.number().int().min(1).max(maxParts)).min(1).max(20),
});

export const uploadFinish = z.object({
  parts: z
    .array(
      z.object({
        number: z.number().int().min(1).max(maxParts),
        etag: z.string().regex(/^"?[0-9a-f]{32}(-\d+)?"?$/i, 'This is no ETag of the file store.'),
      }),
    )
    .max(maxParts)
    .default([]),
});
export type UploadFinish = z.input<typeof uploadFinish>;

/** One signed PUT, or parts that are asked for as they are sent. */
export const uploadSlot = z.discriminatedUnion('mode', [
  z.object({
    mode: z.literal('single'),
    fileId: z.uuid(),
    method: z.literal('PUT'),
    url: z.url(),
    headers: z.record(z.string(), z.string()),
  }),
  z.object({
    mode: z.literal('parts'),
    fileId: z.uuid(),
    method: z.literal('PUT'),
    partBytes: z.number().int(),
    partCount: z.number().int(),
  }),
]);
export type UploadSlot = z.output<typeof uploadSlot>;

export const uploadPartSlots = z.object({
  items: z.array(
    z.object({ number: z.number().int(), url: z.url(), headers: z.record(z.string(), z.string()) }),
  ),
});
export type UploadPartSlots = z.output<typeof uploadPartSlots>;

export const uploadState = z.object({
  id: z.uuid(),
  name: z.string(),
  size: z.number().int(),
  contentType: z.string(),
  state: z.enum(['pending', 'clean', 'refused']),
  sha256: z.string().nullable(),
  refusedReason: z.string().nullable(),
});
export type UploadState = z.output<typeof uploadState>;
