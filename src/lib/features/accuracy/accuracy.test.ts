import { describe, expect, it } from 'vitest';
import { methodVersion } from '../../induction/version.ts';
import { accuracyGroups } from './accuracy-groups.ts';
import { accuracy, allowedText, differenceText, numberText, shareOfAllowed } from './accuracy.ts';

describe('the accuracy record', () => {
  const again = 'run `npm run report:physics`';

  it('belongs to the method in use', () => {
    expect(accuracy.methodVersion, again).toBe(methodVersion);
  });

  it('holds checks for every group and for no other', () => {
    const named = new Set(accuracy.sources.map((one) => one.group));
    expect([...named].sort(), again).toEqual(accuracyGroups.map((one) => one.id).sort());
    expect(accuracy.sources.every((one) => one.checks.length > 0 && one.source !== '')).toBe(true);
  });

  it('holds no difference above what is allowed, and each is value less expected', () => {
    for (const check of accuracy.sources.flatMap((one) => one.checks)) {
      expect(shareOfAllowed(check), check.id).toBeLessThanOrEqual(1);
      // Eight digits are kept of the values, three of the difference.
      const rounding =
        1e-7 * Math.max(Math.abs(check.value), Math.abs(check.expected)) + 5e-3 * Math.abs(check.difference);
      expect(Math.abs(check.value - check.expected - check.difference), check.id).toBeLessThanOrEqual(
        rounding,
      );
    }
  });
});

describe('numbers of the accuracy page', () => {
  const check = { id: '', quantity: '', value: 2.02, expected: 2, difference: 0.02 };

  it('are plain near one and carry a power of ten elsewhere', () => {
    expect(numberText(129949.467, 6)).toBe('129949');
    expect(numberText(-0.0123456, 3)).toBe('−0.0123');
    expect(numberText(1.47738563e-7, 6)).toBe('1.47739 × 10⁻⁷');
    expect(numberText(2.5e12, 2)).toBe('2.5 × 10¹²');
    expect(numberText(0, 3)).toBe('0');
  });

  it('say the difference in the measure of the tolerance', () => {
    expect(differenceText({ ...check, tolerance: { rel: 0.05 } })).toBe('1 %');
    expect(allowedText({ ...check, tolerance: { rel: 0.05 } })).toBe('± 5 %');
    expect(differenceText({ ...check, tolerance: { abs: 0.1 } })).toBe('0.02');
    expect(allowedText({ ...check, tolerance: { abs: 0.1 } })).toBe('± 0.1');
    expect(differenceText({ ...check, difference: 1e-16, tolerance: { rel: 0.05 } })).toBe('0');
  });
});
