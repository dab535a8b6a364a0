import { z } from 'zod';
import {
  milestoneKinds,
  planProblems,
  priceKinds,
  priceKindText,
  taxKinds,
  type BidBody,
} from '../../domain/bid.ts';
import type { MilestoneLimits } from '../../domain/commercial.ts';
import { parseAmount } from '../../domain/money.ts';

/** How many tax and exception rows the form offers; more exceptions than this belong in a talk first. */
export const taxRows = 2;
export const exceptionRows = 8;

const text = (limit: number) => z.string().trim().max(limit, `At most ${limit} characters.`);
const amount = z
  .string()
  .trim()
  .transform((value, context) => {
    if (value === '') return 0;
    const minor = parseAmount(value);
    if (minor === undefined) {
      context.addIssue({ code: 'custom', message: 'Enter an amount such as 1250.00.' });
      return z.NEVER;
    }
    if (minor > 10_000_000_000) {
      context.addIssue({ code: 'custom', message: 'An amount may be 100 million at most.' });
      return z.NEVER;
    }
    return minor;
  });

/** `20`, `12.5 %`, `12,5` → basis points. */
const percent = z
  .string()
  .trim()
  .transform((value, context) => {
    if (value === '') return 0;
    const match = /^(\d{1,3})(?:[.,](\d{1,2}))?\s*%?$/.exec(value);
    const points = match ? Number(match[1]) * 100 + Number((match[2] ?? '').padEnd(2, '0')) : NaN;
    if (!(points >= 0 && points <= 10_000)) {
      context.addIssue({ code: 'custom', message: 'Enter a share between 0 and 100 %.' });
      return z.NEVER;
    }
    return points;
  });

const wholeNumber = (what: string, low: number, high: number) =>
  z
    .string()
    .trim()
    .transform((value, context) => {
      const number = /^\d{1,6}$/.test(value) ? Number(value) : NaN;
      if (!(number >= low && number <= high)) {
        context.addIssue({ code: 'custom', message: `Enter ${what} from ${low} to ${high}.` });
        return z.NEVER;
      }
      return number;
    });

const date = z
  .string()
  .trim()
  .refine((value) => /^\d{4}-\d{2}-\d{2}$/.test(value) && !Number.isNaN(Date.parse(value)), {
    message: 'Enter a date.',
  });

const lineFields = Object.fromEntries(
  priceKinds.flatMap((kind) => [
    [`price.${kind}`, amount],
    [`label.${kind}`, text(120)],
  ]),
) as Record<`price.${(typeof priceKinds)[number]}`, typeof amount> &
  Record<`label.${(typeof priceKinds)[number]}`, ReturnType<typeof text>>;

const shareFields = Object.fromEntries(milestoneKinds.map((kind) => [`share.${kind}`, percent])) as Record<
  `share.${(typeof milestoneKinds)[number]}`,
  typeof percent
>;

export interface BidFormValues {
  body: BidBody;
  leadTimeWorkingDays: number;
  validUntil: string;
  exceptions: { subject: string; text: string }[];
  fileIds: string[];
}

type Problem = { path: string; message: string };

/**
 * Parses the bid form. Fields: `price.<kind>`, `label.<kind>`, `tax.<n>.kind|rate|amount`,
 * `share.<kind>`, `leadTime`, `validUntil`, `toolingOwner`, `warrantyMonths`, `note`,
 * `exception.<n>.subject|text`, `file` (repeated). `strict` asks for all that a submitted bid needs; a draft may be short of
 * anything but must be readable.
 */
export function parseBidForm(
  form: FormData,
  limits: MilestoneLimits,
  strict: boolean,
): { ok: true; values: BidFormValues } | { ok: false; fields: Record<string, string> } {
  const get = (name: string) => {
    const value = form.get(name);
    return typeof value === 'string' ? value : '';
  };
  const problems: Problem[] = [];
  const read = <T>(name: string, schema: z.ZodType<T>, instead: T): T => {
    const parsed = schema.safeParse(get(name));
    if (parsed.success) return parsed.data;
    problems.push({ path: name, message: parsed.error.issues[0]?.message ?? 'Please check this.' });
    return instead;
  };

  const lines = priceKinds.flatMap((kind) => {
    const value = read(`price.${kind}`, lineFields[`price.${kind}`], 0);
    const label = read(`label.${kind}`, lineFields[`label.${kind}`], '');
    return value === 0 && label === '' ? [] : [{ kind, label: label || priceKindText[kind], amount: value }];
  });

  const taxLines = Array.from({ length: taxRows }, (_, n) => n).flatMap((n) => {
    const kind = read(`tax.${n}.kind`, z.enum([...taxKinds, '']), '' as const);
    const rateBp = read(`tax.${n}.rate`, percent, 0);
    const value = read(`tax.${n}.amount`, amount, 0);
    if (kind === '') {
      if (value > 0) problems.push({ path: `tax.${n}.kind`, message: 'Say which tax this is.' });
      return [];
    }
    return [{ kind, rateBp, amount: value }];
  });

  const milestonePlan = milestoneKinds.flatMap((kind) => {
    const shareBp = read(`share.${kind}`, shareFields[`share.${kind}`], 0);
    return shareBp === 0 ? [] : [{ kind, shareBp }];
  });

  const exceptions = Array.from({ length: exceptionRows }, (_, n) => n).flatMap((n) => {
    const subject = read(`exception.${n}.subject`, text(80), '');
    const words = read(`exception.${n}.text`, text(1000), '');
    if (subject === '' && words === '') return [];
    if (subject === '') problems.push({ path: `exception.${n}.subject`, message: 'Say what it is about.' });
    if (words === '')
      problems.push({ path: `exception.${n}.text`, message: 'Say what you would do instead.' });
    return [{ subject, text: words }];
  });

  const leadTimeWorkingDays = read(
    'leadTime',
    strict || get('leadTime').trim() !== ''
      ? wholeNumber('working days', 1, 500)
      : z.string().transform(() => 0),
    0,
  );
  const validUntil = read('validUntil', strict || get('validUntil') !== '' ? date : z.string(), '');
  const toolingOwner = read('toolingOwner', z.enum(['buyer', 'fabricator', 'none']), 'none');
  const warrantyMonths = read(
    'warrantyMonths',
    get('warrantyMonths').trim() === '' ? z.string().transform(() => 0) : wholeNumber('months', 0, 120),
    0,
  );
  const note = read('note', text(4000), '');

  if (strict) {
    if (!lines.some((line) => line.kind === 'coil' && line.amount > 0)) {
      problems.push({ path: 'price.coil', message: 'Enter a price for the coil.' });
    }
    for (const [kind, message] of Object.entries(planProblems(milestonePlan, limits))) {
      problems.push({ path: kind === 'plan' ? 'share.build' : `share.${kind}`, message });
    }
  }
  if (problems.length > 0) {
    const fields: Record<string, string> = {};
    for (const { path, message } of problems) fields[path] ??= message;
    return { ok: false, fields };
  }
  return {
    ok: true,
    values: {
      body: { lines, taxLines, milestonePlan, toolingOwner, warrantyMonths, note },
      leadTimeWorkingDays,
      validUntil,
      exceptions,
      fileIds: form.getAll('file').filter((id): id is string => typeof id === 'string' && id !== ''),
    },
  };
}

const plain = (amountInMinor: number) => (amountInMinor / 100).toFixed(2);
const percentText = (basisPoints: number) => String(basisPoints / 100);

/** The form's texts for a saved bid, the counterpart of `parseBidForm`. */
export function bidFormValues(bid: {
  body: BidBody;
  leadTimeWorkingDays: number;
  validUntil: string;
  exceptions: readonly { subject: string; text: string }[];
}): Record<string, string> {
  const values: Record<string, string> = {
    leadTime: bid.leadTimeWorkingDays > 0 ? String(bid.leadTimeWorkingDays) : '',
    validUntil: bid.validUntil,
    toolingOwner: bid.body.toolingOwner,
    warrantyMonths: String(bid.body.warrantyMonths),
    note: bid.body.note,
  };
  for (const line of bid.body.lines) {
    values[`price.${line.kind}`] = plain(line.amount);
    values[`label.${line.kind}`] = line.label === priceKindText[line.kind] ? '' : line.label;
  }
  bid.body.taxLines.forEach((line, n) => {
    values[`tax.${n}.kind`] = line.kind;
    values[`tax.${n}.rate`] = percentText(line.rateBp);
    values[`tax.${n}.amount`] = plain(line.amount);
  });
  for (const share of bid.body.milestonePlan) values[`share.${share.kind}`] = percentText(share.shareBp);
  bid.exceptions.forEach((row, n) => {
    values[`exception.${n}.subject`] = row.subject;
    values[`exception.${n}.text`] = row.text;
  });
  return values;
}
