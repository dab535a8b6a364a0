/** Units people write, per dimension, with exact factors to SI. */
import type { Unit } from '../check/types.ts';
import { electricalUnits } from './electrical-units.ts';
import { mechanicalUnits } from './mechanical-units.ts';
import type { DimensionEntry, UnitEntry } from './unit-entry.ts';

export type { DimensionEntry, UnitEntry, UnitSet } from './unit-entry.ts';

export const dimensions = [
  'length',
  'distance',
  'temperature',
  'temperature-difference',
  'flow',
  'pressure',
  'power',
  'reactive-power',
  'apparent-power',
  'frequency',
  'inductance',
  'capacitance',
  'voltage',
  'current',
  'resistance',
  'mass',
  'time',
  'energy',
  'velocity',
  'area',
  'flux-density',
  'power-density',
  'angle',
  'fraction',
  'number',
] as const;
export type Dimension = (typeof dimensions)[number];

export const dimensionTable: Record<Dimension, DimensionEntry> = { ...mechanicalUnits, ...electricalUnits };

/** The dimension whose display fits an SI unit of a figure. */
export const dimensionOfUnit: Record<Unit, Dimension> = {
  H: 'inductance',
  F: 'capacitance',
  Hz: 'frequency',
  ohm: 'resistance',
  V: 'voltage',
  A: 'current',
  W: 'power',
  var: 'reactive-power',
  VA: 'apparent-power',
  m: 'length',
  m2: 'area',
  kg: 'mass',
  s: 'time',
  J: 'energy',
  K: 'temperature-difference',
  C: 'temperature',
  Pa: 'pressure',
  'm3/s': 'flow',
  'm/s': 'velocity',
  T: 'flux-density',
  'W/m2': 'power-density',
  deg: 'angle',
  '1': 'number',
};

/** The entry of a unit by its symbol; the tables name only symbols they contain. */
export function unitEntry(dimension: Dimension, symbol: string): UnitEntry {
  const entry = dimensionTable[dimension].units.find((unit) => unit.symbol === symbol);
  if (!entry) throw new Error(`no unit ${symbol} for ${dimension}`);
  return entry;
}
