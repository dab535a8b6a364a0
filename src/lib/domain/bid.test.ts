import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  bidTotals,
  defaultMilestonePlan,
  exposureBeforeEvidence,
  milestoneAmounts,
  planProblems,
  taxOn,
} from './bid.ts';

const limits = { drawingMaxBp: 2000, deliveryMinBp: 2000 };

describe('a bid’s sums', () => {
  it('net holds freight, total holds tax', () => {
    const totals = bidTotals(
      {
        lines: [
          { kind: 'coil', label: '', amount: 100_00 },
          { kind: 'freight', label: '', amount: 20_00 },
        ],
        taxLines: [{ kind: 'vat', rateBp: 1900, amount: 22_80 }],
      },
      'EUR',
    );
    expect(totals).toEqual({ currency: 'EUR', net: 120_00, freight: 20_00, tax: 22_80, total: 142_80 });
  });

  it('refuses a sum beyond exact integers', () => {
    const line = { kind: 'coil' as const, label: '', amount: Number.MAX_SAFE_INTEGER };
    expect(() => bidTotals({ lines: [line, line], taxLines: [] }, 'EUR')).toThrow(RangeError);
  });

  it('takes a tax half up', () => {
    expect(taxOn(50, 1900)).toBe(10); // 9.5
    expect(taxOn(47, 1900)).toBe(9); // 8.93
  });
});

describe('a milestone plan', () => {
  it('splits any total without losing or making a cent', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1_000_000_000_000 }),
        fc.array(fc.integer({ min: 1, max: 9000 }), { minLength: 1, maxLength: 4 }),
        (total, shares) => {
          const kinds = ['material', 'drawing', 'build', 'delivery'] as const;
          const plan = shares.map((shareBp, i) => ({ kind: kinds[i] ?? ('build' as const), shareBp }));
          const amounts = milestoneAmounts(total, plan);
          const sum = shares.reduce((a, b) => a + b, 0);
          expect(amounts.reduce((a, b) => a + b, 0)).toBe(total);
          amounts.forEach((amount, i) => {
            expect(Math.abs(amount - (total * (shares[i] ?? 0)) / sum)).toBeLessThan(1);
          });
        },
      ),
    );
  });

  it('counts material and drawing as released before the measured record', () => {
    expect(exposureBeforeEvidence(100_000, defaultMilestonePlan)).toBe(20_000);
    expect(
      exposureBeforeEvidence(100_000, [
        { kind: 'material', shareBp: 1000 },
        { kind: 'drawing', shareBp: 1000 },
        { kind: 'build', shareBp: 5000 },
        { kind: 'delivery', shareBp: 3000 },
      ]),
    ).toBe(20_000);
  });

  it('is right as it starts, and each departure is told at its field', () => {
    expect(planProblems(defaultMilestonePlan, limits)).toEqual({});
    expect(
      planProblems(
        [
          { kind: 'drawing', shareBp: 2500 },
          { kind: 'build', shareBp: 6000 },
          { kind: 'delivery', shareBp: 1000 },
        ],
        limits,
      ),
    ).toEqual({
      plan: expect.stringContaining('95 %') as string,
      drawing: expect.stringContaining('20 %') as string,
      delivery: expect.stringContaining('20 %') as string,
    });
    expect(planProblems([{ kind: 'build', shareBp: 10_000 }], limits)).toMatchObject({
      drawing: expect.any(String) as string,
      delivery: expect.any(String) as string,
    });
  });
});
