/**
 * The error pattern of every form: the same words beside the field and in the summary, the summary
 * links to the field, and the page title begins with "Error:".
 */

/** One line of the summary; `href` is the field's anchor, or null where no single field is meant. */
export interface SummaryLine {
  message: string;
  href: string | null;
}

/** What a field may be handed as its error: form libraries give lists, endpoints give a string. */
export type FieldError = string | readonly string[] | null | undefined;

/** The id of the control that carries `name`; dots and brackets of nested names become dashes. */
export function fieldId(name: string): string {
  return `field-${name.replace(/[^A-Za-z0-9_-]+/g, '-').replace(/-+$/, '')}`;
}

/** The one message shown: the first of a list, or null. */
export function firstMessage(error: FieldError): string | null {
  if (error === null || error === undefined) return null;
  const message = typeof error === 'string' ? error : error[0];
  return message ? message : null;
}

/**
 * Flattens the error object of a form (nested names, lists, `_errors` for whole-form messages) into
 * summary lines, in the order of the object.
 */
export function summaryLines(errors: unknown, prefix = ''): SummaryLine[] {
  if (errors === null || typeof errors !== 'object') return [];
  const lines: SummaryLine[] = [];
  for (const [key, value] of Object.entries(errors)) {
    const name = key === '_errors' ? prefix : prefix ? `${prefix}.${key}` : key;
    const href = name ? `#${fieldId(name)}` : null;
    if (typeof value === 'string' && value) lines.push({ message: value, href });
    else if (Array.isArray(value) && value.every((entry) => typeof entry === 'string')) {
      const message = firstMessage(value);
      if (message) lines.push({ message, href });
    } else lines.push(...summaryLines(value, name));
  }
  return lines;
}

/** Title of a page with a form: "Error: " goes first, so that it is heard first. */
export function pageTitle(title: string, hasErrors = false): string {
  return `${hasErrors ? 'Error: ' : ''}${title} · Coilyard`;
}
