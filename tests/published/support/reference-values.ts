import { readFileSync } from 'node:fs';

/** One entry of reference/values.json: a handbook, standard or formula value with its source. */
export interface ReferenceValue {
  id: string;
  quantity: string;
  inputs: Record<string, number | string>;
  expected: number | number[] | (string | number)[];
  tolerance: { abs: number } | { rel: number };
  source: string;
  standing: string;
  note?: string;
}

/** One entry of reference/finite-elements.json: a solved case, SI, suffix names the unit. */
export interface SolvedCase {
  id: string;
  family: string;
  description: string;
  inputs: Record<string, number | string | number[] | null>;
  expected: Record<string, number | number[]>;
  uncertainty: Record<string, number>;
  method: string;
  tool: string;
}

const here = new URL('../reference/', import.meta.url);

export const referenceValues = JSON.parse(
  readFileSync(new URL('values.json', here), 'utf8'),
) as ReferenceValue[];
export const solvedCases = JSON.parse(
  readFileSync(new URL('finite-elements.json', here), 'utf8'),
) as SolvedCase[];

/** Entries whose id starts with one of the prefixes, in file order. */
export function valuesOf(...prefixes: string[]): ReferenceValue[] {
  return referenceValues.filter((v) => prefixes.some((p) => v.id.startsWith(p)));
}

export function solvedCase(id: string): SolvedCase {
  const found = solvedCases.find((c) => c.id === id);
  if (found === undefined) throw new Error(`No solved case ${id}`);
  return found;
}

/** A number among the inputs of an entry. */
export function input(v: { id: string; inputs: Record<string, unknown> }, name: string): number {
  const value = v.inputs[name];
  if (typeof value !== 'number') throw new Error(`${v.id} has no number ${name}`);
  return value;
}

/** A single expected number. */
export function single(v: ReferenceValue): number {
  if (typeof v.expected !== 'number') throw new Error(`${v.id} is not a single number`);
  return v.expected;
}
