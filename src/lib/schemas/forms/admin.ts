import { z } from 'zod';
import { handEvents, jobMachine, mailMachine } from '../../domain/delivery.ts';

/** What the lists of the admin are narrowed by; a value that is none narrows nothing. */
const id = z.uuid().nullable().catch(null);

export const mailFilter = z.object({
  state: z.enum(mailMachine.states).nullable().catch(null),
  about: z.string().min(1).max(100).nullable().catch(null),
  after: id,
});
export const jobFilter = z.object({ state: z.enum(jobMachine.states).nullable().catch(null), after: id });
export const userFilter = z.object({
  q: z.string().trim().max(100).catch(''),
  after: z.string().max(320).nullable().catch(null),
});
export const trailFilter = z.object({
  subjectType: z.string().min(1).max(60).nullable().catch(null),
  subjectId: z.string().trim().min(1).max(100).nullable().catch(null),
  companyId: id,
  after: id,
});

export const byHandInput = z.object({ id: z.uuid(), event: z.enum(handEvents) });

/** Query parameters as an object; absent ones are null. */
export function queryOf(params: URLSearchParams, names: readonly string[]): Record<string, string | null> {
  return Object.fromEntries(names.map((name) => [name, params.get(name) || null]));
}
