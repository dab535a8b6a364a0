import { z } from 'zod';
import { AppError } from '../../domain/errors.ts';
import type { AcceptanceLine } from '../../induction/check/types.ts';

/** The part of an order specification that as-built records are judged against. */
const body = z.looseObject({
  requirement: z.looseObject({
    acceptance: z.array(
      z.looseObject({
        id: z.string().min(1),
        kind: z.string(),
        label: z.string(),
        nominal: z.number().nullable(),
        low: z.number().nullable(),
        high: z.number().nullable(),
        unit: z.string(),
      }),
    ),
  }),
});

/** The acceptance lines of an order specification; the text was written by us, so anything else is a fault. */
export function acceptanceLines(specificationBody: string): AcceptanceLine[] {
  let parsed: unknown;
  try {
    parsed = JSON.parse(specificationBody);
  } catch (cause) {
    throw new AppError('invalid-input', { detail: 'The order specification is not readable.', cause });
  }
  const read = body.safeParse(parsed);
  if (!read.success) {
    throw new AppError('invalid-input', { detail: 'The order specification has no acceptance lines.' });
  }
  return read.data.requirement.acceptance as unknown as AcceptanceLine[];
}
