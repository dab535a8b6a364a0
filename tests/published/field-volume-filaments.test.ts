/**
 * The field solution against a model of another kind, written for these tests from first principles
 * (support/volume-filaments.ts): conductors as many thin rings with uniform current. Six cases, at most
 * 800 unknowns each; the limits are the filaments' own error (cells of a third of a skin depth).
 */
import { describe, expect, it } from 'vitest';
import type { Section } from '../../src/lib/induction/coil/section.ts';
import { mutualInductance } from '../../src/lib/induction/field/ring-kernel.ts';
import { helix, roundSection, solveCase, type PlainCase } from './support/field-cases.ts';
import { check, solvedElsewhere } from './support/published-check.ts';
import {
  blockCells,
  circlesMutual,
  solveFilaments,
  tubeCells,
  type Filament,
} from './support/volume-filaments.ts';

const COPPER = 1.85e-8;

function turnsOf(c: PlainCase, layers: number, sectors: number): Filament[] {
  const s = c.coil.section;
  if (s.kind !== 'round') throw new Error('round tubes only');
  return c.coil.rings.flatMap((ring, t) =>
    tubeCells(ring.radius, ring.z, s.radius, s.wall, t, c.copper, layers, sectors),
  );
}

function compare(
  id: string,
  c: PlainCase,
  cells: Filament[],
  limits: { l: number; r: number; load?: number },
): void {
  const reference = solveFilaments(cells, c.coil.rings.length, c.frequency);
  const s = solveCase(c, 'default');
  expect(reference.unknowns).toBeLessThanOrEqual(800);
  const one = (quantity: string, value: number, expected: number, rel: number) =>
    check('filaments', {
      id,
      quantity,
      source: 'volume filaments from first principles, written for these tests',
      standing: solvedElsewhere,
      value,
      expected,
      tolerance: { rel },
    });
  one('L, H', s.inductance, reference.inductance, limits.l);
  one('R, Ω', s.resistance, reference.resistance, limits.r);
  if (limits.load !== undefined) one('R of the part, Ω', s.load, reference.load, limits.load);
}

describe('volume filaments', () => {
  it('share no elliptic integrals with the product, yet agree with its kernel', () => {
    for (const [a, b, d] of [
      [0.05, 0.05, 0.001],
      [0.05, 0.02, 0.04],
      [0.001, 0.05, 0.1],
    ] as const) {
      expect(Math.abs(mutualInductance(a, b, d) / circlesMutual(a, b, d) - 1)).toBeLessThan(1e-9);
    }
  });

  it('one turn of tube, 2 kHz', () => {
    const c: PlainCase = {
      coil: helix(1, 0.03, 0.01, roundSection(0.01, 0.0015)),
      copper: COPPER,
      frequency: 2e3,
      part: null,
    };
    compare('one turn of tube, 2 kHz', c, turnsOf(c, 6, 48), { l: 2e-3, r: 0.01 });
  });

  it('three close turns of thin tube, 5 kHz', () => {
    const c: PlainCase = {
      coil: helix(3, 0.02, 0.0095, roundSection(0.008, 0.001)),
      copper: COPPER,
      frequency: 5e3,
      part: null,
    };
    compare('three close turns of thin tube, 5 kHz', c, turnsOf(c, 5, 44), { l: 2e-3, r: 0.015 });
  });

  it('two turns of solid rod, 1 kHz', () => {
    const c: PlainCase = {
      coil: helix(2, 0.025, 0.012, roundSection(0.01, 0.005)),
      copper: COPPER,
      frequency: 1e3,
      part: null,
    };
    compare('two turns of solid rod, 1 kHz', c, turnsOf(c, 9, 40), { l: 3e-3, r: 0.015 });
  });

  it('one turn around a short stainless bar, 3 kHz', () => {
    const part = {
      outerRadius: 0.015,
      innerRadius: 0,
      low: -0.012,
      high: 0.012,
      resistivity: 7.2e-7,
      permeability: 1,
    };
    const c: PlainCase = {
      coil: helix(1, 0.025, 0.01, roundSection(0.01, 0.0015)),
      copper: COPPER,
      frequency: 3e3,
      part,
    };
    const bar = blockCells({ lowR: 0, highR: 0.015, lowZ: -0.012, highZ: 0.012 }, -1, 7.2e-7, 16, 22);
    compare('one turn around a short stainless bar, 3 kHz', c, [...turnsOf(c, 6, 44), ...bar], {
      l: 3e-3,
      r: 0.015,
      load: 0.015,
    });
  });

  it('two turns in the bore of an offset tube, 4 kHz', () => {
    const part = {
      outerRadius: 0.045,
      innerRadius: 0.035,
      low: -0.005,
      high: 0.02,
      resistivity: 4e-7,
      permeability: 1,
    };
    const c: PlainCase = {
      coil: helix(2, 0.026, 0.012, roundSection(0.008, 0.001)),
      copper: COPPER,
      frequency: 4e3,
      part,
    };
    const tube = blockCells({ lowR: 0.035, highR: 0.045, lowZ: -0.005, highZ: 0.02 }, -1, 4e-7, 14, 20);
    compare('two turns in the bore of an offset tube, 4 kHz', c, [...turnsOf(c, 5, 44), ...tube], {
      l: 3e-3,
      r: 0.015,
      load: 0.015,
    });
  });

  it('one turn of solid rectangular bar, 1 kHz', () => {
    const section: Section = {
      kind: 'rectangular',
      halfAxial: 0.006,
      halfRadial: 0.004,
      wall: 0.004,
      outerCorner: 0,
      innerCorner: 0,
    };
    const c: PlainCase = { coil: helix(1, 0.03, 0.012, section), copper: COPPER, frequency: 1e3, part: null };
    const bar = blockCells({ lowR: 0.026, highR: 0.034, lowZ: -0.006, highZ: 0.006 }, 0, COPPER, 20, 26);
    compare('one turn of solid rectangular bar, 1 kHz', c, bar, { l: 3e-3, r: 0.015 });
  });
});
