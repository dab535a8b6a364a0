/** The fields of a typed form out of a form body: text by path, nothing else. */
import type { Values } from './field-spec.ts';

const longest = 4000;

export function postedValues(form: FormData, prefix: string): Record<string, string> {
  const values: Record<string, string> = {};
  for (const [name, value] of form) {
    if (typeof value !== 'string' || !/^[A-Za-z][A-Za-z0-9.]*$/.test(name)) continue;
    if (name === prefix || name.startsWith(`${prefix}.`)) values[name] = value.slice(0, longest);
  }
  return values;
}

/** Adds or takes away a row of a list, for forms sent without script: `add` or `remove-2`. */
export function withRowChange(
  values: Values,
  list: string,
  rows: number,
  intent: string,
): Record<string, string> {
  const next: Record<string, string> = { ...values };
  if (intent === 'add') return { ...next, [`${list}.rows`]: String(rows + 1) };
  const index = Number(/^remove-(\d+)$/.exec(intent)?.[1] ?? Number.NaN);
  if (!Number.isInteger(index) || index >= rows || rows <= 1) return next;
  const row = new RegExp(`^${list.replaceAll('.', '\\.')}\\.(\\d+)\\.(.+)$`);
  for (const [path, text] of Object.entries(values)) {
    const match = row.exec(path);
    if (!match) continue;
    delete next[path];
    const at = Number(match[1]);
    if (at !== index) next[`${list}.${at > index ? at - 1 : at}.${match[2]}`] = text;
  }
  return { ...next, [`${list}.rows`]: String(rows - 1) };
}
