/**
 * The default setting holds over the whole range of shapes and frequencies: close turns (pitch 1.05 of the
 * tube), 1 mm gaps, part diameter from 0.5 to 100 skin depths, 50 Hz to 1 MHz. Compared with the fine
 * setting (more nodes, finer elements), whose own error against finite elements is in
 * field-solved-cases; power balance as the second witness.
 */
import { describe, expect, it } from 'vitest';
import { MU0 } from '../../src/lib/induction/constants/physical.ts';
import { helix, roundSection, solveCase, type PlainCase } from './support/field-cases.ts';

const COPPER = 1.85e-8;

function tight(frequency: number, diameterOverDepth: number, permeability: number): PlainCase {
  const tube = 0.008;
  const gap = 0.001;
  const part = 0.03;
  const depth = part / diameterOverDepth;
  return {
    coil: helix(5, part / 2 + gap + tube / 2, 1.05 * tube, roundSection(tube, 0.001)),
    copper: COPPER,
    frequency,
    part: {
      outerRadius: part / 2,
      innerRadius: 0,
      low: -0.03,
      high: 0.03,
      resistivity: Math.PI * frequency * MU0 * permeability * depth * depth,
      permeability,
    },
  };
}

describe('close turns and a 1 mm gap', () => {
  const frequencies = [50, 1e3, 1e4, 1e5, 1e6];
  const ratios = [0.5, 2, 10, 100];
  const cases = frequencies.flatMap((f) => ratios.map((r) => [f, r] as const));
  it.each(cases)('at %d Hz, diameter over skin depth %d: default agrees with fine', (f, ratio) => {
    for (const mu of [1, 40]) {
      const a = solveCase(tight(f, ratio, mu), 'default');
      const b = solveCase(tight(f, ratio, mu), 'fine');
      expect(Math.abs(a.inductance / b.inductance - 1)).toBeLessThan(1e-3);
      expect(Math.abs(a.resistance / b.resistance - 1)).toBeLessThan(5e-3);
      expect(Math.abs(a.load / b.load - 1)).toBeLessThan(5e-3);
      expect(Math.min(...a.turnPower, a.load)).toBeGreaterThan(0);
      expect(Math.abs(a.balance)).toBeLessThan(1e-3);
    }
  });

  it.each(frequencies)('bare at %d Hz', (f) => {
    const a = solveCase({ ...tight(f, 1, 1), part: null }, 'default');
    const b = solveCase({ ...tight(f, 1, 1), part: null }, 'fine');
    expect(Math.abs(a.inductance / b.inductance - 1)).toBeLessThan(5e-4);
    expect(Math.abs(a.resistance / b.resistance - 1)).toBeLessThan(5e-3);
  });
});

describe('ordinary coil over frequency', () => {
  const coil = helix(8, 0.045, 0.0125, roundSection(0.01, 0.0015));
  it.each([50, 500, 5e3, 5e4, 5e5, 1e6])(
    'at %d Hz the preview is within its promise of the fine setting',
    (f) => {
      const part = {
        outerRadius: 0.03,
        innerRadius: 0,
        low: -0.04,
        high: 0.06,
        resistivity: 7e-7,
        permeability: 1,
      };
      const a = solveCase({ coil, copper: COPPER, frequency: f, part }, 'preview');
      const b = solveCase({ coil, copper: COPPER, frequency: f, part }, 'fine');
      expect(Math.abs(a.inductance / b.inductance - 1)).toBeLessThan(5e-3);
      expect(Math.abs(a.resistance / b.resistance - 1)).toBeLessThan(0.02);
    },
  );
});
