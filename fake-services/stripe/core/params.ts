/**
 * Parameter schemas. A route declares what it accepts; anything else is `parameter_unknown`, as with the real
 * service, so that a parameter that was renamed or removed in a newer version shows up in tests at once.
 */
import { z } from 'zod';
import { ApiError, invalidParam } from './errors.ts';

/** v1 sends everything as text. */
export const int = () =>
  z.unknown().transform((value, context): number => {
    const parsed =
      typeof value === 'number' || (typeof value === 'string' && /^-?\d+$/.test(value)) ? Number(value) : NaN;
    if (!Number.isSafeInteger(parsed)) context.addIssue({ code: 'custom', message: 'not an integer' });
    return parsed;
  });
export const bool = () =>
  z.union([z.boolean(), z.enum(['true', 'false'])]).transform((value) => value === true || value === 'true');
/** A text that may not be empty; the service reads an empty string as "unset". */
export const text = (max = 5000) => z.string().min(1).max(max);
export const url = () => z.url({ protocol: /^https?$/, error: 'url_invalid' });
export const email = () => z.email({ error: 'email_invalid' });
export const currency = () => z.string().transform((value) => value.toLowerCase());
export const expand = () => z.array(z.string()).max(20).optional();
export const range = () =>
  z
    .union([
      int(),
      z.strictObject({
        gt: int().optional(),
        gte: int().optional(),
        lt: int().optional(),
        lte: int().optional(),
      }),
    ])
    .optional();
/** Keys up to 40 and values up to 500 characters; an empty value removes the key. */
export const metadata = () =>
  z.union([z.record(z.string().max(40), z.string().max(500)), z.literal('')]).optional();
export const page = {
  limit: int().optional(),
  starting_after: text().optional(),
  ending_before: text().optional(),
  expand: expand(),
};

export type MetadataParam = z.output<ReturnType<typeof metadata>>;

/** Merges metadata the way the service does: given keys overwrite, empty values remove, '' clears all. */
export function mergeMetadata(current: Record<string, string>, given: MetadataParam): Record<string, string> {
  if (given === undefined) return { ...current };
  if (given === '') return {};
  const merged = { ...current };
  for (const [key, value] of Object.entries(given)) {
    if (value === '') delete merged[key];
    else merged[key] = value;
  }
  if (Object.keys(merged).length > 50) {
    throw invalidParam('parameter_invalid', 'You can have up to 50 metadata keys.', 'metadata');
  }
  return merged;
}

function bracketed(path: PropertyKey[]): string {
  const [head, ...tail] = path.map(String);
  return `${head ?? ''}${tail.map((part) => `[${part}]`).join('')}`;
}

type Issue = z.core.$ZodIssue;

function flatten(issues: Issue[], prefix: PropertyKey[] = []): Issue[] {
  return issues.flatMap((issue) => {
    const path = [...prefix, ...issue.path];
    if (issue.code === 'invalid_union') {
      // The branch that got furthest says most about what was wrong.
      const branches = issue.errors.map((branch) => flatten(branch, path));
      const unknown = branches.flat().find((inner) => inner.code === 'unrecognized_keys');
      if (unknown !== undefined) return [unknown];
    }
    return [{ ...issue, path }];
  });
}

function toError(issue: Issue, input: unknown): ApiError {
  const param = bracketed(issue.path);
  if (issue.code === 'unrecognized_keys') {
    const name = bracketed([...issue.path, issue.keys[0] ?? '']);
    return invalidParam('parameter_unknown', `Received unknown parameter: ${name}`, name);
  }
  const value = issue.path.reduce<unknown>(
    (at, key) => (typeof at === 'object' && at !== null ? Reflect.get(at, key) : undefined),
    input,
  );
  if (value === undefined)
    return invalidParam('parameter_missing', `Missing required param: ${param}.`, param);
  if (value === '') {
    return invalidParam(
      'parameter_invalid_empty',
      `You passed an empty string for '${param}'. We assume empty values are an attempt to unset a parameter; however '${param}' cannot be unset. You should remove '${param}' from your request or supply a non-empty value.`,
      param,
    );
  }
  if (issue.message === 'url_invalid') return invalidParam('url_invalid', `Not a valid URL`, param);
  if (issue.message === 'email_invalid') {
    return invalidParam('email_invalid', `Invalid email address: ${String(value)}`, param);
  }
  if (issue.code === 'invalid_union' || issue.code === 'custom') {
    return invalidParam('parameter_invalid_integer', `Invalid integer: ${JSON.stringify(value)}`, param);
  }
  if (issue.code === 'too_big') {
    return invalidParam(
      'parameter_invalid_string',
      `Invalid string: ${param} must be at most ${String(issue.maximum)} characters`,
      param,
    );
  }
  return invalidParam('parameter_invalid_string', `Invalid ${param}: ${issue.message}`, param);
}

/** Parses parameters or throws the first refusal in the service's words and codes. */
export function parseParams<S extends z.ZodType>(schema: S, input: unknown): z.output<S> {
  const result = schema.safeParse(input);
  if (result.success) return result.data;
  const issues = flatten(result.error.issues);
  // Unknown parameters are reported before anything else.
  const first = issues.find((issue) => issue.code === 'unrecognized_keys') ?? issues[0];
  throw first === undefined ? invalidParam(undefined, 'Invalid request') : toError(first, input);
}
