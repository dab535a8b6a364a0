/** Money: a safe integer in minor units with its currency; never a float. */
export const currencies = ['EUR', 'USD', 'GBP'] as const;
export type Currency = (typeof currencies)[number];

export interface Money {
  amount: number;
  currency: Currency;
}

function checked(amount: number): number {
  if (!Number.isSafeInteger(amount)) throw new RangeError(`not a whole number of minor units: ${amount}`);
  return amount;
}

export function money(amount: number, currency: Currency): Money {
  return { amount: checked(amount), currency };
}

/** Sum of amounts in one currency; throws RangeError when currencies differ. */
export function sum(items: readonly Money[], currency: Currency): Money {
  let amount = 0;
  for (const item of items) {
    if (item.currency !== currency) throw new RangeError(`${item.currency} added to ${currency}`);
    amount = checked(amount + item.amount);
  }
  return { amount, currency };
}

/**
 * A fraction of an amount in basis points (1/10 000), rounded half up to a minor unit.
 * Valid for amounts ≥ 0 and 0 ≤ basisPoints ≤ 10 000; exact (integer arithmetic by BigInt).
 */
export function fractionHalfUp(amount: number, basisPoints: number): number {
  if (checked(amount) < 0) throw new RangeError('amount below zero');
  if (!Number.isInteger(basisPoints) || basisPoints < 0 || basisPoints > 10_000) {
    throw new RangeError(`basis points out of range: ${basisPoints}`);
  }
  return Number((BigInt(amount) * BigInt(basisPoints) + 5_000n) / 10_000n);
}

/**
 * Splits an amount by weights without losing or making a minor unit: each share is rounded down and
 * the units left go to the largest remainders, the earlier share first on a tie (largest-remainder
 * method of Hamilton).
 */
export function splitByWeights(amount: number, weights: readonly number[]): number[] {
  if (checked(amount) < 0) throw new RangeError('amount below zero');
  if (weights.length === 0 || weights.some((w) => !Number.isSafeInteger(w) || w < 0)) {
    throw new RangeError('weights are whole numbers of zero or more');
  }
  const total = weights.reduce((a, b) => a + BigInt(b), 0n);
  if (total === 0n) throw new RangeError('weights add up to zero');
  const shares = weights.map((weight, index) => {
    const exact = BigInt(amount) * BigInt(weight);
    return { index, share: exact / total, remainder: exact % total };
  });
  let left = BigInt(amount) - shares.reduce((a, s) => a + s.share, 0n);
  const byRemainder = [...shares].sort((a, b) =>
    a.remainder === b.remainder ? a.index - b.index : a.remainder > b.remainder ? -1 : 1,
  );
  for (const entry of byRemainder) {
    if (left === 0n) break;
    entry.share += 1n;
    left -= 1n;
  }
  return shares.map((entry) => Number(entry.share));
}

const digits: Record<Currency, number> = { EUR: 2, USD: 2, GBP: 2 };

/** Text for people, e.g. `EUR 1,234.50` (no-break space); the same on server, browser and in mails. */
export function formatMoney({ amount, currency }: Money): string {
  const sign = amount < 0 ? '−' : '';
  const units = Math.abs(amount) / 10 ** digits[currency];
  const text = units.toLocaleString('en-US', { minimumFractionDigits: 2, maximumFractionDigits: 2 });
  return `${sign}${currency}\u00a0${text}`;
}

/** `1,234.50`, `1234.5`, `1234,50` → minor units; undefined when it is not an amount or ambiguous. */
export function parseAmount(text: string): number | undefined {
  const trimmed = text.trim().replace(/[\s\u00a0'’]/g, '');
  const match =
    /^(\d{1,3}(?:,\d{3})+|\d+)(?:\.(\d{1,2}))?$/.exec(trimmed) ?? /^(\d+)(?:,(\d{1,2}))?$/.exec(trimmed);
  if (!match) return undefined;
  const whole = Number(match[1]?.replace(/,/g, ''));
  const cents = Number((match[2] ?? '').padEnd(2, '0'));
  const amount = whole * 100 + cents;
  return Number.isSafeInteger(amount) ? amount : undefined;
}
