/** Tube sizes, pressure rating and fillers against standards (families b280, b88K, b88M, barlow, braze, wall). */
import { describe, expect, it } from 'vitest';
import { wallFactor } from '../../src/lib/induction/check/findings/tube.ts';
import { fillers } from '../../src/lib/induction/shop/fillers.ts';
import { annealedCopperStress, barlow } from '../../src/lib/induction/shop/pressure.ts';
import { stockTubes } from '../../src/lib/induction/shop/tube-stock.ts';
import { check } from './support/published-check.ts';
import { input, single, valuesOf, type ReferenceValue } from './support/reference-values.ts';

const subject = 'check-tube';
const inch = 0.0254;
const psi = 6894.757293168;
const compare = (v: ReferenceValue, value: number, expected: number, id = v.id) =>
  check(subject, { ...v, id, value, expected });

describe('copper tube', () => {
  it.each([
    ['b280_', 'ASTM B280 annealed'],
    ['b88K_', 'ASTM B88 type K'],
  ])('has the sizes of the standard in the table (%s)', (prefix, standard) => {
    for (const v of valuesOf(prefix)) {
      const [od = 0, wall = 0] = v.expected as number[];
      const near = stockTubes
        .filter((tube) => tube.standard === standard)
        .sort(
          (a, b) =>
            Math.abs(a.outsideDiameter / inch - od) +
            Math.abs(a.wall / inch - wall) -
            (Math.abs(b.outsideDiameter / inch - od) + Math.abs(b.wall / inch - wall)),
        )[0];
      compare(v, (near?.outsideDiameter ?? 0) / inch, od, `${v.id}-outside-diameter`);
      compare(v, (near?.wall ?? 0) / inch, wall, `${v.id}-wall`);
    }
    expect(valuesOf(prefix).length).toBeGreaterThan(4);
  });

  it('has the walls of ASTM B88M types A, B and C', () => {
    for (const v of valuesOf('b88M_')) {
      ['A', 'B', 'C'].forEach((type, i) => {
        const tube = stockTubes.find(
          (one) =>
            one.standard === `ASTM B88M type ${type}` &&
            Math.abs(one.outsideDiameter - input(v, 'od_mm') / 1000) < 1e-9,
        );
        compare(v, (tube?.wall ?? 0) * 1000, Number((v.expected as number[])[i]), `${v.id}-${type}`);
      });
    }
    expect(valuesOf('b88M_')).toHaveLength(7);
  });

  it('has the ratings of Barlow with 6000 psi', () => {
    expect(annealedCopperStress / psi).toBeCloseTo(6000, 6);
    for (const v of valuesOf('barlow_'))
      compare(v, barlow(input(v, 'od_in') * inch, input(v, 'wall_in') * inch) / psi, single(v));
    expect(valuesOf('barlow_')).toHaveLength(3);
  });

  it('has the resistance of a flat wall of finite thickness', () => {
    const walls = valuesOf('wall_');
    for (const v of walls) {
      const t = Object.values(v.inputs).find((one) => typeof one === 'number');
      compare(v, wallFactor(Number(t)), single(v));
    }
    expect(walls.length).toBeGreaterThan(3);
  });
});

describe('brazing fillers', () => {
  it('have the melting ranges printed after AWS A5.8, and cadmium is recognised', () => {
    for (const v of valuesOf('braze_')) {
      const [composition, solidus, liquidus] = v.expected as [string, number, number];
      const found = fillers.find((one) => one.name === v.inputs.class);
      expect(found?.composition).toBe(composition);
      expect(found?.cadmium).toBe(composition.includes('Cd'));
      compare(v, (found?.solidusC ?? 0) * 1.8 + 32, solidus, `${v.id}-solidus`);
      compare(v, (found?.liquidusC ?? 0) * 1.8 + 32, liquidus, `${v.id}-liquidus`);
    }
  });
});
