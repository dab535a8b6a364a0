/** Shape of the unit tables. */
import type { Unit } from '../check/types.ts';

export type UnitSet = 'metric' | 'inch';

export interface UnitEntry {
  /** As shown. */
  symbol: string;
  /** SI = typed · factor + offset. */
  factor: number;
  offset?: number;
  /** Other spellings taken, exact case first, then any case where it stays unambiguous. */
  aliases?: readonly string[];
  /** Known only to be refused or to make another case ambiguous; never shown. */
  hidden?: boolean;
}

export interface DimensionEntry {
  name: string;
  unit: Unit;
  units: readonly UnitEntry[];
  /** What a bare number means, and what a form field shows. */
  field: Record<UnitSet, string>;
  /** Units to choose from for display, in rising size. */
  shown: Record<UnitSet, readonly string[]>;
  example: Record<UnitSet, string>;
}

export const same = (symbols: readonly string[]): Record<UnitSet, readonly string[]> => ({
  metric: symbols,
  inch: symbols,
});
export const both = (text: string): Record<UnitSet, string> => ({ metric: text, inch: text });
