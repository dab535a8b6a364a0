/**
 * Numbers as people type them. A comma followed by exactly three digits is not guessed ("1,000" may be a
 * thousand or one), everything else has one reading.
 */
export type ParsedNumber = { ok: true; value: number; rest: string } | { ok: false; message: string };

const vulgar: Record<string, string> = {
  '½': '1/2',
  '¼': '1/4',
  '¾': '3/4',
  '⅛': '1/8',
  '⅜': '3/8',
  '⅝': '5/8',
  '⅞': '7/8',
  '⅓': '1/3',
  '⅔': '2/3',
};

/** Spaces that word processors put between groups of digits. */
const thinSpaces = /[\u00a0\u2009\u202f]/g;

function normalise(text: string): string {
  let out = text
    .trim()
    .replace(thinSpaces, ' ')
    .replace(/[\u2212\u2013]/g, '-')
    .replace(/\u2044/g, '/');
  for (const [sign, plain] of Object.entries(vulgar)) out = out.replaceAll(sign, ` ${plain}`);
  return out.trim();
}

/**
 * Splits "1 1/2 in" into 1.5 and "in". Takes fractions ("3/8", "1-1/2"), decimal point or comma, grouped
 * thousands where they cannot be mistaken, and exponents.
 */
export function parseNumber(text: string): ParsedNumber {
  const input = normalise(text);
  const fraction = /^([+-]?)(?:(\d+)(?:\s+|-))?(\d+)\/(\d+)(?![\d.,])/.exec(input);
  if (fraction) {
    const [all, sign, whole, top, bottom] = fraction;
    if (Number(bottom) === 0) return { ok: false, message: 'A fraction cannot be divided by zero.' };
    const size = Number(whole ?? 0) + Number(top) / Number(bottom);
    return { ok: true, value: sign === '-' ? -size : size, rest: input.slice(all.length).trim() };
  }
  const match = /^([+-]?)((?:\d{1,3}(?: \d{3})+|[\d.,]*\d[\d.,]*))((?:[eE][+-]?\d+)?)/.exec(input);
  if (!match) return { ok: false, message: `“${text.trim()}” does not start with a number.` };
  const [all, sign, digits = '', exponent = ''] = match;
  const plain = decimal(digits.replaceAll(' ', ''));
  if (!plain.ok) return plain;
  const value = Number(`${sign === '-' ? '-' : ''}${plain.text}${exponent}`);
  if (!Number.isFinite(value)) return { ok: false, message: `“${text.trim()}” is not a number we can read.` };
  return { ok: true, value, rest: input.slice(all.length).trim() };
}

function decimal(digits: string): { ok: true; text: string } | { ok: false; message: string } {
  const commas = digits.split(',').length - 1;
  const points = digits.split('.').length - 1;
  const unreadable = { ok: false as const, message: `“${digits}” is not a number we can read.` };
  if (commas === 0 && points <= 1) return { ok: true, text: digits };
  if (commas > 0 && points > 0) {
    // Both appear: the last one is the decimal sign, the other groups thousands.
    const commaIsDecimal = digits.lastIndexOf(',') > digits.lastIndexOf('.');
    const [group, sign] = commaIsDecimal ? ['.', ','] : [',', '.'];
    const [whole = '', part = '', extra] = digits.split(sign);
    if (extra !== undefined || part.includes(group) || !groupsOfThree(whole.split(group))) return unreadable;
    return { ok: true, text: `${whole.replaceAll(group, '')}.${part}` };
  }
  const sign = commas > 0 ? ',' : '.';
  const parts = digits.split(sign);
  if (parts.length > 2) return groupsOfThree(parts) ? { ok: true, text: parts.join('') } : unreadable;
  const [whole = '', part = ''] = parts;
  if (sign === ',' && part.length === 3 && whole.length >= 1 && whole.length <= 3 && !whole.startsWith('0')) {
    return {
      ok: false,
      message: `“${digits}” may be ${whole}${part} or ${whole}.${part}: write ${whole}${part} or ${whole}.${part}.`,
    };
  }
  return { ok: true, text: `${whole}.${part}` };
}

function groupsOfThree(parts: readonly string[]): boolean {
  const [first = '', ...others] = parts;
  return /^[1-9]\d{0,2}$/.test(first) && others.every((part) => /^\d{3}$/.test(part));
}
