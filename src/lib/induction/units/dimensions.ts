/**
 * Units people write, per dimension, with exact factors to SI.
 *
 * Sources of factors: the inch is 25.4 mm, the pound 0.453 592 37 kg and the pound-force 4.448 221 615 260 5 N
 * exactly (international yard and pound agreement 1959, BIPM SI brochure for the rest); the US gallon is
 * 231 cubic inches (NIST Handbook 44, appendix C); psi = lbf/in².
 */
import type { Unit } from '../check/types.ts';

export type UnitSet = 'metric' | 'inch';

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

const inch = 0.0254;
const psi = 4.4482216152605 / (inch * inch);
const gallon = 231 * inch ** 3;
const pound = 0.45359237;

const same = (symbols: readonly string[]): Record<UnitSet, readonly string[]> => ({
  metric: symbols,
  inch: symbols,
});
const both = (text: string): Record<UnitSet, string> => ({ metric: text, inch: text });

const lengthUnits: readonly UnitEntry[] = [
  { symbol: 'µm', factor: 1e-6, aliases: ['um', 'μm', 'micron', 'microns'] },
  { symbol: 'mil', factor: inch / 1000, aliases: ['mils', 'thou'] },
  { symbol: 'mm', factor: 1e-3, aliases: ['millimetre', 'millimetres', 'millimeter', 'millimeters'] },
  { symbol: 'cm', factor: 1e-2 },
  { symbol: 'in', factor: inch, aliases: ['"', '″', '”', 'inch', 'inches', "''"] },
  { symbol: 'ft', factor: 12 * inch, aliases: ["'", '′', 'foot', 'feet'] },
  { symbol: 'm', factor: 1, aliases: ['metre', 'metres', 'meter', 'meters'] },
];

export const dimensionTable: Record<Dimension, DimensionEntry> = {
  length: {
    name: 'length',
    unit: 'm',
    units: lengthUnits,
    field: { metric: 'mm', inch: 'in' },
    shown: { metric: ['mm', 'm'], inch: ['in', 'ft'] },
    example: { metric: '9.5 mm or 3/8 in', inch: '3/8 in or 9.5 mm' },
  },
  distance: {
    name: 'distance',
    unit: 'm',
    units: lengthUnits,
    field: { metric: 'm', inch: 'ft' },
    shown: { metric: ['m'], inch: ['ft'] },
    example: { metric: '1.2 m or 4 ft', inch: '4 ft or 1.2 m' },
  },
  temperature: {
    name: 'temperature',
    unit: 'C',
    units: [
      { symbol: '°C', factor: 1, aliases: ['C', 'degC', 'deg C', '℃', 'celsius'] },
      { symbol: '°F', factor: 5 / 9, offset: -160 / 9, aliases: ['F', 'degF', 'deg F', '℉', 'fahrenheit'] },
      { symbol: 'K', factor: 1, offset: -273.15, aliases: ['kelvin'] },
    ],
    field: { metric: '°C', inch: '°F' },
    shown: { metric: ['°C'], inch: ['°F'] },
    example: { metric: '850 °C or 1560 °F', inch: '1560 °F or 850 °C' },
  },
  'temperature-difference': {
    name: 'temperature difference',
    unit: 'K',
    units: [
      { symbol: 'K', factor: 1, aliases: ['°C', 'C', 'kelvin'] },
      { symbol: '°F', factor: 5 / 9, aliases: ['F', 'degF'] },
    ],
    field: { metric: 'K', inch: '°F' },
    shown: { metric: ['K'], inch: ['°F'] },
    example: { metric: '15 K', inch: '27 °F' },
  },
  flow: {
    name: 'flow',
    unit: 'm3/s',
    units: [
      {
        symbol: 'L/min',
        factor: 1e-3 / 60,
        aliases: ['l/min', 'lpm', 'L/m', 'litre/min', 'liter/min', 'ltr/min'],
      },
      {
        symbol: 'US gal/min',
        factor: gallon / 60,
        aliases: ['gal/min', 'gpm', 'US gpm', 'USgpm', 'usgal/min', 'gallon/min', 'gallons/min'],
      },
      { symbol: 'm³/h', factor: 1 / 3600, aliases: ['m3/h', 'm^3/h', 'm3/hr'] },
      { symbol: 'L/s', factor: 1e-3, aliases: ['l/s'] },
      { symbol: 'L/h', factor: 1e-3 / 3600, aliases: ['l/h'] },
      { symbol: 'm³/s', factor: 1, aliases: ['m3/s', 'm^3/s'] },
    ],
    field: { metric: 'L/min', inch: 'US gal/min' },
    shown: { metric: ['L/min'], inch: ['US gal/min'] },
    example: { metric: '8 L/min or 2.1 gal/min', inch: '2.1 gal/min or 8 L/min' },
  },
  pressure: {
    name: 'pressure',
    unit: 'Pa',
    units: [
      { symbol: 'bar', factor: 1e5, aliases: ['bars', 'barg'] },
      { symbol: 'mbar', factor: 100 },
      { symbol: 'psi', factor: psi, aliases: ['psig', 'lb/in2', 'lbf/in2', 'lbf/in²'] },
      { symbol: 'ksi', factor: 1000 * psi },
      { symbol: 'MPa', factor: 1e6 },
      { symbol: 'kPa', factor: 1e3 },
      { symbol: 'Pa', factor: 1 },
      { symbol: 'mPa', factor: 1e-3, hidden: true },
    ],
    field: { metric: 'bar', inch: 'psi' },
    shown: { metric: ['bar'], inch: ['psi'] },
    example: { metric: '4 bar or 60 psi', inch: '60 psi or 4 bar' },
  },
  power: {
    name: 'power',
    unit: 'W',
    units: [
      { symbol: 'W', factor: 1, aliases: ['watt', 'watts'] },
      { symbol: 'kW', factor: 1e3 },
      { symbol: 'MW', factor: 1e6 },
      { symbol: 'mW', factor: 1e-3, hidden: true },
    ],
    field: both('kW'),
    shown: same(['W', 'kW', 'MW']),
    example: both('50 kW'),
  },
  'reactive-power': {
    name: 'reactive power',
    unit: 'var',
    units: [
      { symbol: 'var', factor: 1, aliases: ['VAr', 'VAR'] },
      { symbol: 'kvar', factor: 1e3, aliases: ['kVAr', 'kVAR'] },
      { symbol: 'Mvar', factor: 1e6, aliases: ['MVAr', 'MVAR'] },
      { symbol: 'mvar', factor: 1e-3, hidden: true },
    ],
    field: both('kvar'),
    shown: same(['var', 'kvar', 'Mvar']),
    example: both('300 kvar'),
  },
  'apparent-power': {
    name: 'apparent power',
    unit: 'VA',
    units: [
      { symbol: 'VA', factor: 1 },
      { symbol: 'kVA', factor: 1e3 },
      { symbol: 'MVA', factor: 1e6 },
      { symbol: 'mVA', factor: 1e-3, hidden: true },
    ],
    field: both('kVA'),
    shown: same(['VA', 'kVA', 'MVA']),
    example: both('600 kVA'),
  },
  frequency: {
    name: 'frequency',
    unit: 'Hz',
    units: [
      { symbol: 'Hz', factor: 1, aliases: ['cps'] },
      { symbol: 'kHz', factor: 1e3, aliases: ['kc'] },
      { symbol: 'MHz', factor: 1e6 },
      { symbol: 'mHz', factor: 1e-3, hidden: true },
    ],
    field: both('kHz'),
    shown: same(['Hz', 'kHz', 'MHz']),
    example: both('20 kHz'),
  },
  inductance: {
    name: 'inductance',
    unit: 'H',
    units: [
      { symbol: 'nH', factor: 1e-9 },
      { symbol: 'µH', factor: 1e-6, aliases: ['uH', 'μH'] },
      { symbol: 'mH', factor: 1e-3 },
      { symbol: 'H', factor: 1, aliases: ['henry'] },
    ],
    field: both('µH'),
    shown: same(['nH', 'µH', 'mH', 'H']),
    example: both('0.85 µH'),
  },
  capacitance: {
    name: 'capacitance',
    unit: 'F',
    // No mF: in the American trade "MF" and "mfd" are microfarads, so mF is asked back instead of guessed.
    units: [
      { symbol: 'pF', factor: 1e-12 },
      { symbol: 'nF', factor: 1e-9 },
      { symbol: 'µF', factor: 1e-6, aliases: ['uF', 'μF', 'mfd'] },
      { symbol: 'F', factor: 1, aliases: ['farad'] },
    ],
    field: both('µF'),
    shown: same(['pF', 'nF', 'µF']),
    example: both('0.66 µF'),
  },
  voltage: {
    name: 'voltage',
    unit: 'V',
    units: [
      { symbol: 'mV', factor: 1e-3 },
      { symbol: 'V', factor: 1, aliases: ['volt', 'volts', 'Vrms', 'Vac', 'Vdc'] },
      { symbol: 'kV', factor: 1e3 },
      { symbol: 'MV', factor: 1e6, hidden: true },
    ],
    field: both('V'),
    shown: same(['mV', 'V', 'kV']),
    example: both('600 V'),
  },
  current: {
    name: 'current',
    unit: 'A',
    units: [
      { symbol: 'mA', factor: 1e-3 },
      { symbol: 'A', factor: 1, aliases: ['amp', 'amps', 'Arms'] },
      { symbol: 'kA', factor: 1e3 },
      { symbol: 'MA', factor: 1e6, hidden: true },
    ],
    field: both('A'),
    shown: same(['mA', 'A', 'kA']),
    example: both('400 A'),
  },
  resistance: {
    name: 'resistance',
    unit: 'ohm',
    units: [
      { symbol: 'µΩ', factor: 1e-6, aliases: ['uohm', 'uΩ', 'μΩ', 'µohm', 'μohm', 'microohm', 'micro-ohm'] },
      { symbol: 'mΩ', factor: 1e-3, aliases: ['mohm', 'milliohm', 'milliohms'] },
      { symbol: 'Ω', factor: 1, aliases: ['ohm', 'ohms', 'Ω'] },
      { symbol: 'kΩ', factor: 1e3, aliases: ['kohm'] },
      { symbol: 'MΩ', factor: 1e6, aliases: ['Mohm', 'megohm'] },
    ],
    field: both('mΩ'),
    shown: same(['µΩ', 'mΩ', 'Ω', 'kΩ', 'MΩ']),
    example: both('12 mΩ'),
  },
  mass: {
    name: 'mass',
    unit: 'kg',
    units: [
      { symbol: 'g', factor: 1e-3, aliases: ['gram', 'grams'] },
      { symbol: 'kg', factor: 1 },
      { symbol: 't', factor: 1000, aliases: ['tonne', 'tonnes'] },
      { symbol: 'oz', factor: pound / 16 },
      { symbol: 'lb', factor: pound, aliases: ['lbs', 'lbm', 'pound', 'pounds'] },
    ],
    field: { metric: 'kg', inch: 'lb' },
    shown: { metric: ['g', 'kg'], inch: ['oz', 'lb'] },
    example: { metric: '0.8 kg or 1.8 lb', inch: '1.8 lb or 0.8 kg' },
  },
  time: {
    name: 'time',
    unit: 's',
    units: [
      { symbol: 'ms', factor: 1e-3 },
      { symbol: 's', factor: 1, aliases: ['sec', 'secs', 'second', 'seconds'] },
      { symbol: 'min', factor: 60, aliases: ['mins', 'minute', 'minutes'] },
      { symbol: 'h', factor: 3600, aliases: ['hr', 'hrs', 'hour', 'hours'] },
    ],
    field: both('s'),
    shown: same(['ms', 's', 'min', 'h']),
    example: both('6 s'),
  },
  energy: {
    name: 'energy',
    unit: 'J',
    units: [
      { symbol: 'J', factor: 1 },
      { symbol: 'kJ', factor: 1e3 },
      { symbol: 'MJ', factor: 1e6 },
      { symbol: 'mJ', factor: 1e-3, hidden: true },
      { symbol: 'kWh', factor: 3.6e6 },
    ],
    field: both('kJ'),
    shown: same(['J', 'kJ', 'MJ']),
    example: both('120 kJ'),
  },
  velocity: {
    name: 'velocity',
    unit: 'm/s',
    units: [
      { symbol: 'm/s', factor: 1 },
      { symbol: 'ft/s', factor: 12 * inch, aliases: ['fps'] },
    ],
    field: { metric: 'm/s', inch: 'ft/s' },
    shown: { metric: ['m/s'], inch: ['ft/s'] },
    example: { metric: '2 m/s', inch: '6 ft/s' },
  },
  area: {
    name: 'area',
    unit: 'm2',
    units: [
      { symbol: 'mm²', factor: 1e-6, aliases: ['mm2'] },
      { symbol: 'cm²', factor: 1e-4, aliases: ['cm2'] },
      { symbol: 'm²', factor: 1, aliases: ['m2'] },
      { symbol: 'in²', factor: inch * inch, aliases: ['in2', 'sq in'] },
    ],
    field: { metric: 'mm²', inch: 'in²' },
    shown: { metric: ['mm²', 'cm²', 'm²'], inch: ['in²'] },
    example: { metric: '120 mm²', inch: '0.2 in²' },
  },
  'flux-density': {
    name: 'flux density',
    unit: 'T',
    units: [
      { symbol: 'nT', factor: 1e-9 },
      { symbol: 'µT', factor: 1e-6, aliases: ['uT', 'μT'] },
      { symbol: 'mT', factor: 1e-3 },
      { symbol: 'T', factor: 1 },
      { symbol: 'G', factor: 1e-4, aliases: ['gauss'] },
    ],
    field: both('µT'),
    shown: same(['nT', 'µT', 'mT', 'T']),
    example: both('100 µT'),
  },
  'power-density': {
    name: 'power density',
    unit: 'W/m2',
    units: [
      { symbol: 'W/cm²', factor: 1e4, aliases: ['W/cm2'] },
      { symbol: 'kW/cm²', factor: 1e7, aliases: ['kW/cm2'] },
      { symbol: 'W/m²', factor: 1, aliases: ['W/m2'] },
      { symbol: 'W/in²', factor: 1 / (inch * inch), aliases: ['W/in2'] },
      { symbol: 'kW/in²', factor: 1000 / (inch * inch), aliases: ['kW/in2'] },
    ],
    field: { metric: 'W/cm²', inch: 'W/in²' },
    shown: { metric: ['W/cm²', 'kW/cm²'], inch: ['W/in²', 'kW/in²'] },
    example: { metric: '500 W/cm²', inch: '3.2 kW/in²' },
  },
  angle: {
    name: 'angle',
    unit: 'deg',
    units: [
      { symbol: '°', factor: 1, aliases: ['deg', 'degree', 'degrees'] },
      { symbol: 'rad', factor: 180 / Math.PI },
    ],
    field: both('°'),
    shown: same(['°']),
    example: both('30°'),
  },
  fraction: {
    name: 'share',
    unit: '1',
    units: [
      { symbol: '%', factor: 0.01, aliases: ['percent', 'per cent'] },
      { symbol: '', factor: 1, hidden: true },
    ],
    field: both('%'),
    shown: same(['%']),
    example: both('5 %'),
  },
  number: {
    name: 'number',
    unit: '1',
    units: [{ symbol: '', factor: 1 }],
    field: both(''),
    shown: same(['']),
    example: both('5'),
  },
};

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
