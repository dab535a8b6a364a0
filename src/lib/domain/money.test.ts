import fc from 'fast-check';
import { expect, test } from 'vitest';
import { formatMoney, fractionHalfUp, money, parseAmount, splitByWeights, sum } from './money.ts';

const amount = fc.integer({ min: 0, max: 1_000_000_000_000 });

test('money is a safe whole number of minor units, never a float', () => {
  expect(money(1250, 'EUR')).toEqual({ amount: 1250, currency: 'EUR' });
  for (const bad of [0.5, NaN, Infinity, 2 ** 53]) expect(() => money(bad, 'EUR')).toThrow(RangeError);
});

test('currencies are never mixed in a sum', () => {
  expect(sum([money(1, 'EUR'), money(2, 'EUR')], 'EUR').amount).toBe(3);
  expect(sum([], 'USD')).toEqual({ amount: 0, currency: 'USD' });
  expect(() => sum([money(1, 'EUR'), money(2, 'USD')], 'EUR')).toThrow(/USD added to EUR/);
  expect(() => sum([money(2 ** 52, 'EUR'), money(2 ** 52, 'EUR')], 'EUR')).toThrow(RangeError);
});

test('a fee is rounded half up to a minor unit', () => {
  // 5 % of 10.10, 10.09, 9.90 and 0.10.
  expect(fractionHalfUp(1010, 500)).toBe(51);
  expect(fractionHalfUp(1009, 500)).toBe(50);
  expect(fractionHalfUp(990, 500)).toBe(50);
  expect(fractionHalfUp(10, 500)).toBe(1);
  expect(() => fractionHalfUp(-1, 500)).toThrow(RangeError);
  expect(() => fractionHalfUp(1, 10_001)).toThrow(RangeError);
});

test('a fraction never leaves the amount, and differs from the exact one by half a unit at most', () => {
  fc.assert(
    fc.property(amount, fc.integer({ min: 0, max: 10_000 }), (a, bp) => {
      const part = fractionHalfUp(a, bp);
      expect(part).toBeGreaterThanOrEqual(0);
      expect(part).toBeLessThanOrEqual(a);
      const twice = 2n * (BigInt(part) * 10_000n - BigInt(a) * BigInt(bp));
      expect(twice > -10_000n && twice <= 10_000n).toBe(true);
    }),
  );
});

test('a split loses and makes no minor unit, and no share is off by a whole one', () => {
  expect(splitByWeights(100, [1, 1, 1])).toEqual([34, 33, 33]);
  expect(splitByWeights(5, [0, 3, 0])).toEqual([0, 5, 0]);
  fc.assert(
    fc.property(
      amount,
      fc.array(fc.integer({ min: 0, max: 10_000 }), { minLength: 1, maxLength: 8 }),
      (a, weights) => {
        const total = weights.reduce((x, y) => x + y, 0);
        if (total === 0) {
          expect(() => splitByWeights(a, weights)).toThrow(RangeError);
          return;
        }
        const shares = splitByWeights(a, weights);
        expect(shares.reduce((x, y) => x + y, 0)).toBe(a);
        shares.forEach((share, i) => {
          const exact = (BigInt(a) * BigInt(weights[i] ?? 0)) / BigInt(total);
          expect(BigInt(share) - exact === 0n || BigInt(share) - exact === 1n).toBe(true);
        });
      },
    ),
  );
});

test('typed amounts are read in the forms people use; what is ambiguous or finer than a cent is asked about', () => {
  const read: [string, number | undefined][] = [
    ['1250', 125_000],
    ['1,250.50', 125_050],
    ['1250,5', 125_050],
    ['1 250.00', 125_000],
    ['0.07', 7],
    ['1,250', 125_000],
    ['1.250,00', undefined],
    ['12.345', undefined],
    ['-5', undefined],
    ['1e3', undefined],
    ['', undefined],
    ['99999999999999999', undefined],
  ];
  for (const [text, expected] of read) expect(parseAmount(text), text).toBe(expected);
});

test('what is written out is read back as the same amount', () => {
  fc.assert(
    fc.property(amount, (a) => {
      const text = formatMoney({ amount: a, currency: 'GBP' });
      expect(parseAmount(text.replace('GBP\u00a0', ''))).toBe(a);
    }),
  );
  expect(formatMoney({ amount: -123_456, currency: 'USD' })).toBe('−USD\u00a01,234.56');
});
