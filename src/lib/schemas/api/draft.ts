/** A request's draft as the composer saves it: what was typed, by field path. */
import { z } from 'zod';

export const draftFormSchema = z
  .object({
    unitSet: z.enum(['metric', 'inch']),
    values: z
      .record(
        z
          .string()
          .regex(/^[A-Za-z][A-Za-z0-9]*(\.[A-Za-z0-9]+)*$/)
          .max(120),
        z.string().max(4000, 'A field may hold at most 4000 characters.'),
      )
      .refine((values) => Object.keys(values).length <= 1000, 'That is more fields than a request has.'),
  })
  .describe('Field texts by path, in the unit set they were typed in');

export const saveDraftSchema = z.object({
  version: z.int().min(1).describe('The version that was seen'),
  form: draftFormSchema,
  machineId: z.string().max(40).nullable(),
  machineVersion: z.int().min(1).nullable(),
});

export const findingNameSchema = z.object({
  checkId: z.string().max(40),
  code: z.string().max(60),
  subject: z.string().max(200),
});

export const answerFindingSchema = z.discriminatedUnion('kind', [
  findingNameSchema.extend({ kind: z.literal('acknowledged') }),
  findingNameSchema.extend({
    kind: z.literal('carried'),
    reason: z
      .string()
      .trim()
      .min(10, 'Say in a sentence why you carry this: bidders read it.')
      .max(1000, 'At most 1000 characters.'),
  }),
]);
export type AnswerFinding = z.infer<typeof answerFindingSchema>;
