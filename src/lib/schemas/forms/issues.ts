import type { z } from 'zod';

/** Issues of an API schema by the form's field paths; the first message of a field wins. */
export function issuesToFields(
  problem: z.ZodError,
  prefix: string,
  elsewhere: Readonly<Record<string, string>> = {},
): Record<string, string> {
  const fields: Record<string, string> = {};
  for (const issue of problem.issues) {
    const path = [...(prefix ? [prefix] : []), ...issue.path.map(String)].join('.');
    fields[elsewhere[path] ?? path] ??= issue.message;
  }
  return fields;
}
