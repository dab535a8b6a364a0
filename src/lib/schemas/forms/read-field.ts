/** Text of one field to its SI value, and back. Typed units are parsed here, once. */
import { currencies, parseAmount } from '../../domain/money.ts';
import { dimensionTable, type Dimension, type UnitSet } from '../../induction/units/dimensions.ts';
import { formatField } from '../../induction/units/format-quantity.ts';
import { parseNumber } from '../../induction/units/parse-number.ts';
import { parseQuantity } from '../../induction/units/parse-quantity.ts';
import type { FieldSpec } from './field-spec.ts';

export type ReadField = { ok: true; value: unknown } | { ok: false; message: string };

const fail = (message: string): ReadField => ({ ok: false, message });

function readNumber(text: string, label: string): ReadField {
  const parsed = parseNumber(text);
  if (!parsed.ok) return fail(parsed.message);
  if (parsed.rest !== '') return fail(`${label}: write a number without a unit.`);
  return { ok: true, value: parsed.value };
}

function readList(text: string, read: (item: string) => ReadField): ReadField {
  const values: unknown[] = [];
  for (const item of text.split(/[;\n]+|,\s+/).map((part) => part.trim())) {
    if (item === '') continue;
    const one = read(item);
    if (!one.ok) return one;
    values.push(one.value);
  }
  return { ok: true, value: values };
}

function isCalendarDate(text: string): boolean {
  if (!/^\d{4}-\d{2}-\d{2}$/.test(text)) return false;
  const at = Date.parse(`${text}T00:00:00Z`);
  return Number.isFinite(at) && new Date(at).toISOString().slice(0, 10) === text;
}

/** Reads text that is not empty. */
export function readField(field: FieldSpec, text: string, unitSet: UnitSet): ReadField {
  const typed = text.trim();
  switch (field.kind) {
    case 'quantity': {
      const parsed = parseQuantity(typed, field.dimension, unitSet);
      return parsed.ok ? { ok: true, value: parsed.value } : fail(parsed.message);
    }
    case 'plain': {
      const number = parseNumber(typed);
      if (!number.ok) return fail(number.message);
      const rest = number.rest.replace(/\s+/g, '');
      if (rest !== '' && rest !== field.unit.replace(/\s+/g, '')) {
        return fail(`${field.label} is written in ${field.unit || 'plain numbers'}.`);
      }
      return { ok: true, value: number.value * field.factor };
    }
    case 'count':
      return /^\d{1,6}$/.test(typed)
        ? { ok: true, value: Number(typed) }
        : fail(`${field.label} is a whole number.`);
    case 'choice':
      return field.options.some((option) => option.value === typed)
        ? { ok: true, value: typed }
        : fail(`Choose one of the answers for ${field.label.toLowerCase()}.`);
    case 'flag':
      return { ok: true, value: typed === 'yes' || typed === 'on' };
    case 'text':
      return typed.length <= field.most
        ? { ok: true, value: typed }
        : fail(`${field.label} may have at most ${field.most} characters.`);
    case 'lines':
      return {
        ok: true,
        value: typed
          .split('\n')
          .map((line) => line.trim())
          .filter((line) => line !== ''),
      };
    case 'numbers':
      return readList(typed, (item) => readNumber(item.replace(/\s*:\s*1$/, ''), field.label));
    case 'lengths':
      return readList(typed, (item) => {
        const parsed = parseQuantity(item, 'length', unitSet);
        return parsed.ok ? { ok: true, value: parsed.value } : fail(parsed.message);
      });
    case 'date':
      return isCalendarDate(typed) ? { ok: true, value: typed } : fail('Choose a day of the calendar.');
    case 'money': {
      const amount = parseAmount(typed.replace(/[€$£]|EUR|USD|GBP/gi, ''));
      return amount === undefined
        ? fail(`Write an amount such as 1250.00, in ${currencies.join(', ')} as chosen.`)
        : { ok: true, value: amount };
    }
    case 'percent': {
      const parsed = parseQuantity(typed, 'fraction', unitSet);
      if (!parsed.ok) return fail(parsed.message);
      return { ok: true, value: Math.round(parsed.value * 10_000) };
    }
  }
}

/** The value of an empty field. */
export function emptyValue(field: FieldSpec): unknown {
  switch (field.kind) {
    case 'text':
      return '';
    case 'flag':
      return false;
    case 'lines':
    case 'numbers':
    case 'lengths':
      return [];
    default:
      return null;
  }
}

/** The number alone where the text is in the field's own unit: the unit stands beside the field. */
function bare(text: string, dimension: Dimension, unitSet: UnitSet): string {
  const unit = dimensionTable[dimension].field[unitSet];
  return unit !== '' && text.endsWith(unit) ? text.slice(0, -unit.length).trimEnd() : text;
}

/** A stored value as the text of its field. */
export function fieldText(field: FieldSpec, value: unknown, unitSet: UnitSet): string {
  if (value === null || value === undefined) return '';
  switch (field.kind) {
    case 'quantity':
      return typeof value === 'number'
        ? bare(formatField(value, field.dimension, unitSet), field.dimension, unitSet)
        : '';
    case 'plain':
      return typeof value === 'number' ? String(Number((value / field.factor).toPrecision(8))) : '';
    case 'flag':
      return value === true ? 'yes' : '';
    case 'lines':
      return Array.isArray(value) ? value.map(String).join('\n') : '';
    case 'numbers':
      return Array.isArray(value) ? value.map(String).join('; ') : '';
    case 'lengths':
      return Array.isArray(value)
        ? value.map((one) => (typeof one === 'number' ? formatField(one, 'length', unitSet) : '')).join('; ')
        : '';
    case 'money':
      return typeof value === 'number' ? (value / 100).toFixed(2) : '';
    case 'percent':
      return typeof value === 'number' ? `${value / 100} %` : '';
    default:
      return typeof value === 'string' || typeof value === 'number' ? String(value) : '';
  }
}

/**
 * How text with a unit of its own was read, in the unit set: "3/8 in" in metric gives "= 9.525 mm".
 * Empty where the text says the same already.
 */
export function readingOf(text: string, dimension: Dimension, unitSet: UnitSet): string {
  const parsed = parseQuantity(text, dimension, unitSet);
  if (!parsed.ok || text.trim() === '') return '';
  const own = dimensionTable[dimension].field[unitSet];
  const plainNumber = parseNumber(text);
  const fraction = /[/½¼¾⅛⅜⅝⅞⅓⅔]/.test(text);
  if (parsed.unit === own && !fraction) return '';
  if (plainNumber.ok && plainNumber.rest === '' && !fraction) return '';
  return `= ${formatField(parsed.value, dimension, unitSet)}`;
}

/**
 * Text typed in one unit set as text of another: bare numbers and fractions get their unit's number in
 * the other set; text with a unit of its own stays as it was typed.
 */
export function textInSet(text: string, dimension: Dimension, from: UnitSet, to: UnitSet): string {
  if (from === to) return text;
  const number = parseNumber(text);
  if (!number.ok || number.rest !== '') return text;
  if (dimensionTable[dimension].field[from] === dimensionTable[dimension].field[to]) return text;
  const parsed = parseQuantity(text, dimension, from);
  return parsed.ok ? bare(formatField(parsed.value, dimension, to), dimension, to) : text;
}
