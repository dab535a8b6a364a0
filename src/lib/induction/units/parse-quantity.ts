/** Typed quantities: number and unit to SI, once, at the edge. */
import { dimensionTable, unitEntry, type Dimension, type UnitEntry, type UnitSet } from './dimensions.ts';
import { parseNumber } from './parse-number.ts';

export type ParsedQuantity =
  | { ok: true; value: number; /** Symbol of the unit it was read in. */ unit: string }
  | { ok: false; message: string };

/**
 * Reads what a person typed as a quantity of a dimension.
 *
 * @param text "3/8 in", "9.5mm", "9,5 mm", "60 psi", "0.66 uF", "1560 °F"; a bare number is in the field unit of
 *   the person's unit set (mm or in, °C or °F, L/min or US gal/min, bar or psi, kg or lb).
 * @returns the value in SI base units (temperatures in °C, angles in degrees), or a message for the person.
 *   Nothing is guessed: "1,000" and units whose case decides (mW, MW) are asked back.
 * @example parseQuantity('3/8 in', 'length', 'metric') // { ok: true, value: 0.009525, unit: 'in' }
 */
export function parseQuantity(text: string, dimension: Dimension, unitSet: UnitSet): ParsedQuantity {
  const entry = dimensionTable[dimension];
  const hint = `Write a ${entry.name} such as ${entry.example[unitSet]}.`;
  if (text.trim() === '') return { ok: false, message: hint };
  const number = parseNumber(text);
  if (!number.ok) return { ok: false, message: `${number.message} ${hint}` };
  const compound = feetAndInches(number.value, number.rest, dimension);
  if (compound !== null) return { ok: true, value: compound, unit: 'ft' };
  const unit =
    number.rest === '' ? unitEntry(dimension, entry.field[unitSet]) : findUnit(number.rest, dimension);
  if (unit === 'ambiguous') {
    return {
      ok: false,
      message: `“${number.rest}” can mean two units: write the capitals as in ${known(dimension)}.`,
    };
  }
  if (unit === null) {
    return {
      ok: false,
      message: `“${number.rest}” is not a unit of ${entry.name} we know: use ${known(dimension)}.`,
    };
  }
  return { ok: true, value: number.value * unit.factor + (unit.offset ?? 0), unit: unit.symbol };
}

/** 1 ft 6 in, 1' 6 1/2": the one compound people write. */
function feetAndInches(feet: number, rest: string, dimension: Dimension): number | null {
  if (dimension !== 'length' && dimension !== 'distance') return null;
  const match = /^(?:ft|'|′|feet|foot)\s*(\d.*)$/i.exec(rest);
  if (!match?.[1]) return null;
  const inches = parseNumber(match[1]);
  if (!inches.ok || findUnit(inches.rest || 'in', 'length') !== unitEntry('length', 'in')) return null;
  return feet * unitEntry('length', 'ft').factor + inches.value * unitEntry('length', 'in').factor;
}

function squeeze(text: string): string {
  return text
    .replace(/\s+/g, '')
    .replace(/μ/g, 'µ')
    .replace(/\u2126/g, 'Ω')
    .replace(/\.$/, '');
}

function spellings(unit: UnitEntry): string[] {
  return [unit.symbol, ...(unit.aliases ?? [])].map(squeeze);
}

function findUnit(text: string, dimension: Dimension): UnitEntry | 'ambiguous' | null {
  const units = dimensionTable[dimension].units;
  const wanted = squeeze(text);
  const exact = units.find((unit) => spellings(unit).includes(wanted));
  // A hidden unit exists only so that a slip of capitals (mPa for MPa) is asked back.
  if (exact) return exact.hidden && exact.symbol !== '' ? 'ambiguous' : exact;
  const lower = wanted.toLowerCase();
  const loose = units.filter((unit) => spellings(unit).some((one) => one.toLowerCase() === lower));
  if (loose.length === 1 && loose[0]) return loose[0];
  return loose.length > 1 ? 'ambiguous' : null;
}

function known(dimension: Dimension): string {
  const symbols = dimensionTable[dimension].units
    .filter((unit) => !unit.hidden)
    .map((unit) => unit.symbol || 'no unit');
  return symbols.length === 1 ? `${symbols[0]}` : `${symbols.slice(0, -1).join(', ')} or ${symbols.at(-1)}`;
}
