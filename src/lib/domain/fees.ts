/**
 * Platform fee of a release, minor units: `basisPoints` of the part of the fee base that is released,
 * rounded half up once: round(feeBase · release / amount · basisPoints / 10 000).
 *
 * Valid for whole numbers with 0 ≤ feeBase ≤ amount, amount > 0, 0 ≤ release ≤ amount and
 * 0 ≤ basisPoints ≤ 10 000; throws RangeError otherwise. Exact (BigInt).
 *
 * Example: amount 119.00, net part 100.00, all released, 500 basis points → 5.00.
 */
export function platformFee(input: {
  amount: number;
  feeBase: number;
  release: number;
  basisPoints: number;
}): number {
  const { amount, feeBase, release, basisPoints } = input;
  for (const value of [amount, feeBase, release, basisPoints]) {
    if (!Number.isSafeInteger(value) || value < 0) throw new RangeError(`not a whole amount: ${value}`);
  }
  if (amount === 0 || feeBase > amount || release > amount || basisPoints > 10_000) {
    throw new RangeError('amounts out of range');
  }
  const divisor = BigInt(amount) * 10_000n;
  const exact = BigInt(feeBase) * BigInt(release) * BigInt(basisPoints);
  return Number((exact + divisor / 2n) / divisor);
}

/** What a release of `release` gives to the fabricator and to the platform; both add up to it. */
export function payout(input: { amount: number; feeBase: number; release: number; basisPoints: number }): {
  net: number;
  fee: number;
} {
  const fee = platformFee(input);
  return { net: input.release - fee, fee };
}
