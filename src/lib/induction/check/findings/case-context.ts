/** For the tests of the rules: one examined requirement, and copies of it with single values changed. */
import { examine } from '../examine.ts';
import { exampleRequirement } from '../examples.ts';
import type { CheckContext, Rule } from '../context.ts';
import type { FindingCode, Requirement } from '../types.ts';

/** The example in stainless steel: not magnetic, so that it is solved in a moment. */
export function plainRequirement(): Requirement {
  const requirement = exampleRequirement();
  requirement.part.material = { kind: 'library', id: 'stainless-304' };
  requirement.process.time = 12;
  return requirement;
}

let base: CheckContext | null = null;

export function baseContext(): CheckContext {
  base ??= examine(plainRequirement(), { setting: 'preview' });
  return base;
}

export function examined(change: (requirement: Requirement) => void): CheckContext {
  const requirement = plainRequirement();
  change(requirement);
  return examine(requirement, { setting: 'preview', bands: false });
}

/** A copy with values at dotted paths replaced; everything off the paths is shared. */
export function changed(context: CheckContext, values: Record<string, unknown>): CheckContext {
  return Object.entries(values).reduce(
    (copy, [path, value]) => replaceAt(copy, path.split('.'), value),
    context,
  );
}

function replaceAt<T>(target: T, [key, ...rest]: string[], value: unknown): T {
  if (key === undefined) return value as T;
  if (Array.isArray(target)) {
    const copy: unknown[] = [...target];
    copy[Number(key)] = replaceAt(copy[Number(key)], rest, value);
    return copy as T;
  }
  if (target === null || typeof target !== 'object') throw new Error(`nothing at ${key}`);
  const record = target as Record<string, unknown>;
  if (!(key in record)) throw new Error(`no ${key} to change`);
  return { ...record, [key]: replaceAt(record[key], rest, value) } as T;
}

/** Index of the fitted row in the base ladder. */
export const fittedIndex = (): number => baseContext().ladder.findIndex((row) => row.fitted);

export const codesOf = (rule: Rule, context: CheckContext): FindingCode[] =>
  rule(context).map((one) => one.code);

/** A case: values that raise the finding, values beside them that do not. */
export interface RuleCase {
  code: FindingCode;
  rule: Rule;
  raises: () => CheckContext;
  not: () => CheckContext;
  severity?: 'blocker' | 'caution' | 'note';
}
