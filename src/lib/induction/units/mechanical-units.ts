/** Units of lengths, temperatures, water, masses, times and plain numbers. */
import { both, same, type DimensionEntry, type UnitEntry } from './unit-entry.ts';

/**
 * Exact factors to SI: the inch is 25.4 mm, the pound 0.453 592 37 kg and the pound-force 4.448 221 615 260 5 N
 * (international yard and pound agreement 1959, BIPM SI brochure for the rest); the US gallon is 231 cubic inches
 * (NIST Handbook 44, appendix C); psi = lbf/in².
 */
const inch = 0.0254;
const psi = 4.4482216152605 / (inch * inch);
const gallon = 231 * inch ** 3;
const pound = 0.45359237;

const lengthUnits: readonly UnitEntry[] = [
  { symbol: 'µm', factor: 1e-6, aliases: ['um', 'μm', 'micron', 'microns'] },
  { symbol: 'mil', factor: inch / 1000, aliases: ['mils', 'thou'] },
  { symbol: 'mm', factor: 1e-3, aliases: ['millimetre', 'millimetres', 'millimeter', 'millimeters'] },
  { symbol: 'cm', factor: 1e-2 },
  { symbol: 'in', factor: inch, aliases: ['"', '″', '”', 'inch', 'inches', "''"] },
  { symbol: 'ft', factor: 12 * inch, aliases: ["'", '′', 'foot', 'feet'] },
  { symbol: 'm', factor: 1, aliases: ['metre', 'metres', 'meter', 'meters'] },
];

export const mechanicalUnits = {
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
} satisfies Record<string, DimensionEntry>;
