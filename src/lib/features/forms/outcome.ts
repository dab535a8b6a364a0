import { summaryLines, type SummaryLine } from '../../ui/form-errors.ts';

/** What an action answers when it could not be done; see the form wrapper of the server. */
export interface Failure {
  code: string;
  message: string;
  fields: Record<string, string>;
  values: Record<string, string>;
  form: string;
  data: unknown;
}

/** The failure of the named form of the page, or null; any form's when no name is given. */
export function failureOf(form: unknown, name?: string): Failure | null {
  if (form === null || typeof form !== 'object' || !('fields' in form) || !('values' in form)) return null;
  const failure = form as Failure;
  return name === undefined || failure.form === name ? failure : null;
}

/** Lines for the summary: each field's message, or the message alone. `prefix` as in the fields' ids. */
export function failureLines(failure: Failure | null, prefix = ''): SummaryLine[] {
  if (!failure) return [];
  const lines = summaryLines(failure.fields, prefix);
  return lines.length > 0 ? lines : [{ message: failure.message, href: null }];
}

/** Which form was done, with words for people; null otherwise. */
export function doneOf(form: unknown): { form: string; words: string } | null {
  if (form === null || typeof form !== 'object' || !('done' in form) || !('words' in form)) return null;
  return { form: String(form.done), words: String(form.words) };
}
