/**
 * Reference levels for people against ICNIRP 2010 and 2020 (families icnirp2010, icnirp2020), and the field of a coil
 * against the computed table of the practice note. Not applicable: eu2013 (its electric action level, the check gives no
 * electric field), cispr11 (conducted emission of the supply, not of the coil).
 */
import { describe, expect, it } from 'vitest';
import { MU0 } from '../../src/lib/induction/constants/physical.ts';
import {
  icnirp2010,
  icnirp2010Electric,
  icnirp2020,
  referenceLevel,
} from '../../src/lib/induction/surroundings/reference-levels.ts';
import { coilField } from '../../src/lib/induction/surroundings/loop-field.ts';
import { check } from './support/published-check.ts';
import { input, valuesOf, type ReferenceValue } from './support/reference-values.ts';

const subject = 'check-safety';
const compare = (v: ReferenceValue, i: number, value: number, name: string) =>
  check(subject, {
    id: `${v.id}-${name}`,
    quantity: v.quantity,
    source: v.source,
    standing: v.standing,
    tolerance: v.tolerance,
    value,
    expected: Number((v.expected as number[])[i]),
  });

describe('reference levels', () => {
  it('are those of ICNIRP 2010 for flux density and electric field', () => {
    for (const v of valuesOf('icnirp2010_')) {
      const f = input(v, 'f_Hz');
      compare(v, 0, icnirp2010(f, 'occupational') * 1e6, 'occupational-B');
      compare(v, 1, icnirp2010(f, 'public') * 1e6, 'public-B');
      compare(v, 2, icnirp2010Electric(f, 'occupational'), 'occupational-E');
      compare(v, 3, icnirp2010Electric(f, 'public'), 'public-E');
    }
    expect(valuesOf('icnirp2010_')).toHaveLength(6);
  });

  it('are those of ICNIRP 2020 for the magnetic field, local and whole body', () => {
    for (const v of valuesOf('icnirp2020_')) {
      const kind = v.id.includes('_wb_') ? 'whole-body' : 'local';
      const f = input(v, 'f_MHz') * 1e6;
      compare(v, 1, icnirp2020(f, 'occupational', kind), 'occupational-H');
      compare(v, 3, icnirp2020(f, 'public', kind), 'public-H');
    }
    expect(valuesOf('icnirp2020_')).toHaveLength(7);
  });

  it('take the stricter of both above 100 kHz', () => {
    for (const v of valuesOf('icnirp2020_wb_')) {
      const f = input(v, 'f_MHz') * 1e6;
      const level = referenceLevel(f, 'occupational').fluxDensity;
      expect(level).toBeCloseTo(Math.min(1e-4, MU0 * Number((v.expected as number[])[1])), 9);
    }
  });
});

describe('field of a coil', () => {
  it.each([
    [0.1, 425],
    [0.2, 51],
    [0.3, 15],
    [0.5, 3.2],
  ])(
    'on the axis at %s m of eight turns of 56 mm at 100 A is %s µT (computed table; pitch taken as 8 mm)',
    (z, expected) => {
      const rings = Array.from({ length: 8 }, (_, i) => ({ radius: 0.028, z: (i - 3.5) * 0.008 }));
      const value = coilField({ rings, turnsPerRing: 1, leads: null }, { x: 0, y: 0, z }) * 100 * 1e6;
      check(subject, {
        id: `axis-field-${z}`,
        quantity: 'flux density on the axis, µT',
        source: 'superposed rings, computed table of the practice note',
        standing: 'from memory',
        value,
        expected,
        tolerance: { rel: 0.06 },
      });
      expect(value).toBeGreaterThan(0);
    },
  );
});
