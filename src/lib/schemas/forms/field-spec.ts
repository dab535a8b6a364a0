/**
 * A form as a table of fields. Each field has the path of the value in the API type it becomes, so that
 * a finding's subject, a fix and an error all find their field by the same name.
 */
import type { Dimension, UnitSet } from '../../induction/units/dimensions.ts';

/** What was typed, by path. */
export type Values = Readonly<Record<string, string>>;

export interface Choice {
  value: string;
  label: string;
}

/** What an empty field means: an error, a stated default, nothing at all, or a value the checker finds. */
export type Empty = 'required' | 'not-known' | 'none' | 'proposed';

interface Common {
  path: string;
  label: string;
  hint?: string;
  empty: Empty;
  /** Shown and read only while this holds. */
  when?: (values: Values) => boolean;
  /** Filled in on a new form. */
  initial?: string;
}

export type FieldSpec = Common &
  (
    | { kind: 'quantity'; dimension: Dimension }
    /** A plain number with a fixed unit: SI = typed · factor. */
    | { kind: 'plain'; unit: string; factor: number }
    | { kind: 'count' }
    | { kind: 'choice'; options: readonly Choice[] }
    | { kind: 'flag' }
    | { kind: 'text'; most: number; rows?: number }
    /** One text per line. */
    | { kind: 'lines' }
    /** Numbers with space or semicolon between them. */
    | { kind: 'numbers' }
    /** Lengths with semicolon between them. */
    | { kind: 'lengths' }
    | { kind: 'date' }
    | { kind: 'money' }
    | { kind: 'percent' }
  );

export interface FieldGroupSpec {
  title: string;
  lead?: string;
  fields: readonly FieldSpec[];
}

type Options = Partial<Omit<Common, 'path' | 'label'>>;

const common = (path: string, label: string, options: Options, empty: Empty): Common => ({
  path,
  label,
  empty,
  ...options,
});

export const quantity = (
  path: string,
  label: string,
  dimension: Dimension,
  options: Options = {},
): FieldSpec => ({
  ...common(path, label, options, 'required'),
  kind: 'quantity',
  dimension,
});
export const plain = (
  path: string,
  label: string,
  unit: string,
  factor: number,
  options: Options = {},
): FieldSpec => ({ ...common(path, label, options, 'required'), kind: 'plain', unit, factor });
export const count = (path: string, label: string, options: Options = {}): FieldSpec => ({
  ...common(path, label, options, 'required'),
  kind: 'count',
});
export const choice = (
  path: string,
  label: string,
  options: readonly (readonly [string, string])[],
  more: Options = {},
): FieldSpec => ({
  ...common(path, label, more, 'required'),
  kind: 'choice',
  options: options.map(([value, text]) => ({ value, label: text })),
});
export const flag = (path: string, label: string, options: Options = {}): FieldSpec => ({
  ...common(path, label, options, 'none'),
  kind: 'flag',
});
export const text = (
  path: string,
  label: string,
  most: number,
  options: Options & { rows?: number } = {},
): FieldSpec => ({ ...common(path, label, options, 'none'), kind: 'text', most, ...options });
export const special = (
  kind: 'lines' | 'numbers' | 'lengths' | 'date' | 'money' | 'percent',
  path: string,
  label: string,
  options: Options = {},
): FieldSpec => ({ ...common(path, label, options, 'none'), kind }) as FieldSpec;

/** The fields that count with these values. */
export function shownFields(groups: readonly FieldGroupSpec[], values: Values): FieldSpec[] {
  return groups.flatMap((group) => group.fields).filter((field) => !field.when || field.when(values));
}

export interface ParsedField {
  value: unknown;
  /** How a typed unit other than the field's own was read, e.g. "= 9.525 mm". */
  reading?: string;
}

export interface FormOutcome {
  /** Fields whose text cannot be read, with the message for the person. */
  errors: Record<string, string>;
  /** Required fields that are empty. */
  missing: string[];
}

export interface ReadContext {
  values: Values;
  unitSet: UnitSet;
}
