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

/** After a conflict: the newer state that somebody else saved, by field; null for any other failure. */
export function newerOf(failure: Failure | null): Record<string, unknown> | null {
  if (failure?.code !== 'version-conflict' || failure.data === null || typeof failure.data !== 'object')
    return null;
  return failure.data as Record<string, unknown>;
}

/** The version a form sends: the one that was loaded, or after a conflict the newer one, which is shown then. */
export function versionFor(failure: Failure | null, loaded: number): number {
  const version = newerOf(failure)?.['version'];
  return typeof version === 'number' ? version : loaded;
}
