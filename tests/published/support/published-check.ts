import { appendFileSync, mkdirSync } from 'node:fs';
import { expect } from 'vitest';

/** How far a value may lie from the source's: absolute, or relative to it. */
export type Tolerance = { abs: number } | { rel: number };

/** One comparison with the outside: what, where it comes from, the source's number and ours. */
export interface PublishedCheck {
  id: string;
  quantity: string;
  source: string;
  /** How far the source itself is known: printed, evaluated, solved for this project, from memory. */
  standing: string;
  value: number;
  expected: number;
  tolerance: Tolerance;
}

/** Standing of values that were computed by another method for this comparison. */
export const solvedElsewhere = 'solved for this project by another method';
/** Standing of values that follow from a formula anyone can evaluate. */
export const evaluated = 'evaluated from the named formula';

/**
 * Compares and, when the report is being made (PHYSICS_REPORT names a folder), appends a line with value,
 * expected and difference to `<folder>/<subject>.jsonl`.
 */
export function check(subject: string, c: PublishedCheck): void {
  const difference = c.value - c.expected;
  const allowed = 'abs' in c.tolerance ? c.tolerance.abs : c.tolerance.rel * Math.abs(c.expected);
  const folder = process.env['PHYSICS_REPORT'];
  if (folder !== undefined && folder !== '') {
    mkdirSync(folder, { recursive: true });
    const relative = c.expected === 0 ? null : difference / c.expected;
    const { id, quantity, source, standing, value, expected, tolerance } = c;
    const met = Math.abs(difference) <= allowed;
    const line = { id, quantity, source, standing, value, expected, tolerance, difference, relative, met };
    appendFileSync(`${folder}/${subject}.jsonl`, `${JSON.stringify(line)}\n`);
  }
  expect(
    Math.abs(difference),
    `${c.id} (${c.source}): ${c.quantity} is ${c.value}, expected ${c.expected} ± ${allowed}`,
  ).toBeLessThanOrEqual(allowed);
}
