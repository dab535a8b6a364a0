import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { payout, platformFee } from './fees.ts';
import { fractionHalfUp, splitByWeights } from './money.ts';

const parts = fc.integer({ min: 1, max: 99_999_999 }).chain((amount) =>
  fc.record({
    amount: fc.constant(amount),
    feeBase: fc.integer({ min: 0, max: amount }),
    release: fc.integer({ min: 0, max: amount }),
    basisPoints: fc.integer({ min: 0, max: 10_000 }),
  }),
);

describe('platform fee', () => {
  test.each([
    [{ amount: 11_900, feeBase: 10_000, release: 11_900, basisPoints: 500 }, 500],
    [{ amount: 23_800, feeBase: 19_000, release: 23_800, basisPoints: 500 }, 950],
    [{ amount: 23_800, feeBase: 19_000, release: 11_900, basisPoints: 500 }, 475],
    // 0.5 of a minor unit goes up, just below it goes down.
    [{ amount: 10, feeBase: 10, release: 10, basisPoints: 500 }, 1],
    [{ amount: 9, feeBase: 9, release: 9, basisPoints: 500 }, 0],
    [{ amount: 100, feeBase: 0, release: 100, basisPoints: 500 }, 0],
    [{ amount: 100, feeBase: 100, release: 0, basisPoints: 500 }, 0],
  ])('of %o is %i', (input, fee) => {
    expect(platformFee(input)).toBe(fee);
  });

  test('of a whole release is the plain fraction of the fee base, half up', () => {
    fc.assert(
      fc.property(parts, ({ amount, feeBase, basisPoints }) => {
        expect(platformFee({ amount, feeBase, release: amount, basisPoints })).toBe(
          fractionHalfUp(feeBase, basisPoints),
        );
      }),
      { numRuns: 10_000 },
    );
  });

  test('fee and payout add up to the release, neither is negative, and the exact fee is within half a unit', () => {
    fc.assert(
      fc.property(parts, (input) => {
        const { net, fee } = payout(input);
        expect(net + fee).toBe(input.release);
        expect(fee).toBeGreaterThanOrEqual(0);
        expect(net).toBeGreaterThanOrEqual(0);
        // |fee − exact| ≤ ½ without a division: 2·|fee·d − n| ≤ d
        const d = BigInt(input.amount) * 10_000n;
        const n = BigInt(input.feeBase) * BigInt(input.release) * BigInt(input.basisPoints);
        const off = BigInt(fee) * d - n;
        expect(2n * (off < 0n ? -off : off) <= d).toBe(true);
      }),
      { numRuns: 10_000 },
    );
  });

  test('a larger release never has a smaller fee', () => {
    fc.assert(
      fc.property(parts, fc.nat(1_000_000), (input, less) => {
        const smaller = Math.max(0, input.release - less);
        expect(platformFee({ ...input, release: smaller })).toBeLessThanOrEqual(platformFee(input));
      }),
      { numRuns: 10_000 },
    );
  });

  test.each([
    { amount: 0, feeBase: 0, release: 0, basisPoints: 500 },
    { amount: 10, feeBase: 11, release: 10, basisPoints: 500 },
    { amount: 10, feeBase: 10, release: 11, basisPoints: 500 },
    { amount: 10, feeBase: 10, release: 10, basisPoints: 10_001 },
    { amount: 10.5, feeBase: 10, release: 10, basisPoints: 500 },
    { amount: 10, feeBase: 10, release: -1, basisPoints: 500 },
  ])('refuses %o', (input) => {
    expect(() => platformFee(input)).toThrow(RangeError);
  });
});

test('splitting by weights loses and makes no minor unit, and no share is more than one off', () => {
  fc.assert(
    fc.property(
      fc.nat(999_999_999),
      fc
        .array(fc.integer({ min: 0, max: 10_000 }), { minLength: 1, maxLength: 8 })
        .filter((w) => w.some((x) => x > 0)),
      (amount, weights) => {
        const shares = splitByWeights(amount, weights);
        expect(shares.reduce((a, b) => a + b, 0)).toBe(amount);
        const total = weights.reduce((a, b) => a + b, 0);
        for (const [index, share] of shares.entries()) {
          expect(Math.abs(share - (amount * (weights[index] ?? 0)) / total)).toBeLessThan(1);
        }
      },
    ),
    { numRuns: 10_000 },
  );
});
