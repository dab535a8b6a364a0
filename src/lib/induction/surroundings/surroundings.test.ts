import { describe, expect, it } from 'vitest';
import { MU0 } from '../constants/physical.ts';
import {
  coilField,
  ellipticKE,
  keepOutDistance,
  ringField,
  segmentField,
  worstFieldAt,
  type FieldSource,
} from './loop-field.ts';
import { spherePower, steadyRise } from './metal-part.ts';
import { referenceLevel } from './reference-levels.ts';

const eight: FieldSource = {
  rings: Array.from({ length: 8 }, (_, i) => ({ radius: 0.028, z: (i - 3.5) * 0.008 })),
  turnsPerRing: 1,
  leads: null,
};

describe('field around a coil', () => {
  it('has the elliptic integrals of the tables', () => {
    // K(1/2) and E(1/2): Abramowitz & Stegun, table 17.1.
    expect(ellipticKE(0.5).k).toBeCloseTo(1.854074677301372, 12);
    expect(ellipticKE(0.5).e).toBeCloseTo(1.350643881047675, 12);
  });

  it('agrees off the axis with a polygon of straight conductors', () => {
    const a = 0.05;
    const at = { x: 0.07, y: 0.01, z: 0.03 };
    const n = 720;
    const sum = { x: 0, y: 0, z: 0 };
    for (let i = 0; i < n; i++) {
      const point = (k: number) => ({
        x: a * Math.cos((2 * Math.PI * k) / n),
        y: a * Math.sin((2 * Math.PI * k) / n),
        z: 0,
      });
      const b = segmentField(point(i), point(i + 1), at);
      sum.x += b.x;
      sum.y += b.y;
      sum.z += b.z;
    }
    const exact = ringField(a, Math.hypot(at.x, at.y), at.z);
    expect(Math.hypot(sum.x, sum.y) / exact.r).toBeCloseTo(1, 3);
    expect(sum.z / exact.z).toBeCloseTo(1, 3);
  });

  it('gives the axial field of eight turns of 56 mm at 100 A (reference table)', () => {
    const at = (z: number) => coilField(eight, { x: 0, y: 0, z }) * 100 * 1e6;
    // Computed values of the practice table: pitch not stated there, so to two digits.
    expect(at(0.2)).toBeGreaterThan(45);
    expect(at(0.2)).toBeLessThan(55);
    expect(at(0.5)).toBeCloseTo(3.2, 0);
  });

  it('falls below the level outside the keep-out distance and not inside', () => {
    const distance = keepOutDistance(eight, 500, 1e-4);
    expect(worstFieldAt(eight, distance * 1.001) * 500).toBeLessThanOrEqual(1e-4);
    expect(worstFieldAt(eight, distance * 0.98) * 500).toBeGreaterThan(1e-4);
    expect(keepOutDistance(eight, 1e-3, 1e-4)).toBe(0);
  });

  it('reaches further with leads apart than with none', () => {
    const leads = { start: 0.03, length: 0.5, spacing: 0.1 };
    expect(keepOutDistance({ ...eight, leads }, 500, 1e-4)).toBeGreaterThan(
      keepOutDistance(eight, 500, 1e-4),
    );
  });
});

describe('reference levels', () => {
  it('take the stricter of 2010 and 2020 above 100 kHz', () => {
    expect(referenceLevel(20e3, 'occupational')).toEqual({
      fluxDensity: 1e-4,
      name: 'ICNIRP 2010 occupational, instantaneous',
    });
    expect(referenceLevel(200e3, 'occupational').fluxDensity).toBeCloseTo(MU0 * 24.5, 12);
    expect(referenceLevel(200e3, 'public').name).toContain('2020');
  });
});

describe('small metal part', () => {
  it('heats with the square of the field, and a transparent one with its fifth power of size', () => {
    expect(spherePower(2e-3, 0.01, 2e4, 7e-7) / spherePower(1e-3, 0.01, 2e4, 7e-7)).toBeCloseTo(4, 9);
    const thick = (size: number) => spherePower(1e-3, size, 50, 1e-5);
    expect(thick(0.002) / thick(0.001)).toBeCloseTo(32, 3);
    expect(steadyRise(1, 0.02)).toBeCloseTo(1 / (15 * Math.PI * 4e-4), 9);
  });
});
