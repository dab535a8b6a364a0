/** SI values as text in a person's unit set, with no more digits than the band allows. */
import type { Figure, Quantity, Unit } from '../check/types.ts';
import {
  dimensionOfUnit,
  dimensionTable,
  unitEntry,
  type Dimension,
  type UnitEntry,
  type UnitSet,
} from './dimensions.ts';

/** Digits shown where no band is known. */
const plainDigits = 4;
/** Digits kept in a form field, so that what was typed comes back as it was. */
const fieldDigits = 8;

export interface FormatOptions {
  /** Overrides the dimension that the unit suggests (a share as %, a distance in m or ft). */
  dimension?: Dimension | undefined;
  /** Significant digits where no band is given (4). */
  digits?: number;
}

/**
 * A value with its unit as text.
 *
 * @param value in the SI unit `unit` (°C for `C`).
 * @param band half width (± band) in the same unit: the last digit shown is never finer than a fifth of it.
 * @example formatQuantity(0.009525, 'm', 'inch') // "0.375 in"
 * @example formatQuantity(20034, 'Hz', 'metric', 500) // "20.0 kHz"
 */
export function formatQuantity(
  value: number,
  unit: Unit,
  unitSet: UnitSet,
  band?: number | null,
  options: FormatOptions = {},
): string {
  const dimension = options.dimension ?? dimensionOfUnit[unit];
  if (!Number.isFinite(value)) return '–';
  const shown = chooseUnit(value, dimension, unitSet);
  const scaled = band == null ? null : Math.abs(band) / shown.factor;
  return withUnit(digitsOf(fromSi(value, shown), scaled, options.digits), shown.symbol);
}

/** The value and both ends of a figure's band, all in one unit: "20.0 kHz (19.5 to 20.5)". */
export function formatFigure(
  figure: Figure,
  unitSet: UnitSet,
  options: FormatOptions = {},
): { value: string; range: string } {
  const dimension = options.dimension ?? dimensionOfUnit[figure.unit];
  const half = (figure.high - figure.low) / 2;
  const shown = chooseUnit(figure.value, dimension, unitSet);
  const text = (value: number) => digitsOf(fromSi(value, shown), half / shown.factor);
  return {
    value: Number.isFinite(figure.value) ? withUnit(text(figure.value), shown.symbol) : '–',
    range: Number.isFinite(half)
      ? `${text(figure.low)} to ${withUnit(text(figure.high), shown.symbol)}`
      : '–',
  };
}

/** A quantity of a finding. */
export function formatValue(quantity: Quantity, unitSet: UnitSet, options: FormatOptions = {}): string {
  return formatQuantity(quantity.value, quantity.unit, unitSet, null, options);
}

/**
 * The text of a form field: in the field unit of the set, exact to eight digits, without trailing zeros, so that
 * reading it back gives the stored value.
 */
export function formatField(value: number | null, dimension: Dimension, unitSet: UnitSet): string {
  if (value === null || !Number.isFinite(value)) return '';
  const unit = unitEntry(dimension, dimensionTable[dimension].field[unitSet]);
  return withUnit(trim(Number(fromSi(value, unit).toPrecision(fieldDigits)), fieldDigits), unit.symbol);
}

function fromSi(value: number, unit: UnitEntry): number {
  return (value - (unit.offset ?? 0)) / unit.factor;
}

/** The largest shown unit in which the number is not below one; zero takes the field unit. */
function chooseUnit(value: number, dimension: Dimension, unitSet: UnitSet): UnitEntry {
  const entry = dimensionTable[dimension];
  const shown = entry.shown[unitSet].map((symbol) => unitEntry(dimension, symbol));
  const field = unitEntry(dimension, entry.field[unitSet]);
  if (shown.length === 1 || value === 0) return shown.includes(field) ? field : (shown[0] ?? field);
  const size = Math.abs(value) * (1 + 1e-9);
  let best = shown[0] ?? field;
  for (const unit of shown) if (size >= unit.factor * threshold(unit.symbol)) best = unit;
  return best;
}

/** People keep mm and inches for long pieces, seconds for a minute or two. */
function threshold(symbol: string): number {
  if (symbol === 'ft') return 10;
  if (symbol === 'min') return 5;
  if (symbol === 'h') return 2;
  return 1;
}

function digitsOf(value: number, band: number | null, digits = plainDigits): string {
  if (band === null || !(band > 0) || !Number.isFinite(band)) return trim(value, digits);
  // Smallest place value that is not finer than a fifth of the band (with room for rounding of the logarithm).
  const place = Math.ceil(Math.log10(band / 5) - 1e-9);
  const mostPlace = value === 0 ? place : Math.floor(Math.log10(Math.abs(value)));
  // A band wider than the value itself still shows the value's first digit.
  const used = Math.min(place, Math.max(mostPlace, 0));
  // Digits far below what the value's own size can carry are noise even where the band is tiny.
  const finest = value === 0 ? used : Math.max(used, mostPlace - 6);
  if (finest >= 0) {
    const step = 10 ** finest;
    return plain((Math.round(value / step) * step).toFixed(0));
  }
  return plain(value.toFixed(Math.min(-finest, 12)));
}

function plain(text: string): string {
  return /^-0(\.0*)?$/.test(text) ? text.slice(1) : text;
}

function trim(value: number, digits: number): string {
  if (value === 0) return '0';
  const size = Math.abs(value);
  if (size >= 1e9 || size < 1e-6)
    return value
      .toExponential(digits - 1)
      .replace(/\.?0+e/, 'e')
      .replace('e+', 'e');
  const decimals = Math.max(0, digits - 1 - Math.floor(Math.log10(size)));
  // Whole numbers are not rounded to significant digits: 12 345 turns into neither 12 350 nor 1.235e4.
  return plain(
    value
      .toFixed(Math.min(decimals, 15))
      .replace(/(\.\d*?)0+$/, '$1')
      .replace(/\.$/, ''),
  );
}

function withUnit(number: string, symbol: string): string {
  if (symbol === '') return number;
  return symbol === '°' ? `${number}${symbol}` : `${number} ${symbol}`;
}
