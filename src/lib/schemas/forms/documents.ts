import { z } from 'zod';
import { companyDocumentKindText } from '../../domain/files.ts';

const kinds = Object.keys(companyDocumentKindText) as (keyof typeof companyDocumentKindText)[];

export const companyDocumentInput = z.object({
  file: z.uuid('Upload the file first.'),
  title: z
    .string()
    .trim()
    .min(3, 'Say in a few words what this paper is.')
    .max(120, 'Keep the title below 120 characters.'),
  kind: z.enum(kinds, 'Choose what kind of paper this is.'),
});

export const archiveDocumentInput = z.object({
  documentId: z.uuid(),
  version: z.coerce.number().int().min(1),
});
