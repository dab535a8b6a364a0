/** What the comparisons with the outside gave, as `npm run report:physics` wrote it down. */
import type { AccuracyGroupId } from './accuracy-groups.ts';
import data from './accuracy.json';

/** Absolute, or relative to the expected value. */
export type Tolerance = { abs: number } | { rel: number };

export interface AccuracyCheck {
  id: string;
  quantity: string;
  value: number;
  expected: number;
  difference: number;
  tolerance: Tolerance;
}

/** The checks of one group against one source. */
export interface SourceChecks {
  group: AccuracyGroupId;
  source: string;
  standing: string;
  checks: AccuracyCheck[];
}

export interface Accuracy {
  methodVersion: string;
  sources: SourceChecks[];
}

export const accuracy = data as Accuracy;

/** Largest difference a tolerance allows, in the unit of the value. */
export const allowed = (check: AccuracyCheck): number =>
  'abs' in check.tolerance ? check.tolerance.abs : check.tolerance.rel * Math.abs(check.expected);

/** Difference as a share of what is allowed, 0 to 1. */
export const shareOfAllowed = (check: AccuracyCheck): number => Math.abs(check.difference) / allowed(check);

const superscripts = '⁰¹²³⁴⁵⁶⁷⁸⁹';

/** A number with a few digits, the power of ten written out where it is far from 1. */
export function numberText(value: number, digits: number): string {
  if (value === 0) return '0';
  const [mantissa = '', exponent = '0'] = value.toExponential(digits - 1).split('e');
  const power = Number(exponent);
  if (power >= -3 && power < 6) return String(Number(value.toPrecision(digits))).replace('-', '−');
  const raised = [...String(Math.abs(power))].map((d) => superscripts[Number(d)]).join('');
  return `${String(Number(mantissa)).replace('-', '−')} × 10${power < 0 ? '⁻' : ''}${raised}`;
}

/** Below this nothing but the rounding of the computer is left. */
const ROUNDING = 1e-12;

/** The difference in the measure of its tolerance: per cent, or the unit of the value. */
export function differenceText(check: AccuracyCheck): string {
  const relative = Math.abs(check.difference) / Math.max(Math.abs(check.expected), Number.MIN_VALUE);
  if (relative < ROUNDING) return '0';
  if ('rel' in check.tolerance) return `${numberText((100 * check.difference) / check.expected, 2)} %`;
  return numberText(check.difference, 2);
}

/** The tolerance in the same measure. */
export const allowedText = (check: AccuracyCheck): string =>
  'rel' in check.tolerance
    ? `± ${numberText(100 * check.tolerance.rel, 2)} %`
    : `± ${numberText(check.tolerance.abs, 2)}`;
