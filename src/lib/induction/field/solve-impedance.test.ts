import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Coil, ImpedanceQuery, Workpiece } from '../check/types.ts';
import { InductionInputError } from '../input-error.ts';
import { solveField } from './coil-block.ts';
import { fluxDensityAt } from './flux-density.ts';
import { blockAt, impedanceAt, prepareCoil, solveImpedance } from './solve-impedance.ts';

const coil: Coil = {
  winding: { shape: 'helix', insideDiameter: 0.05, clearance: null, turns: 4, pitch: 0.011 },
  tube: { kind: 'round', outsideDiameter: 0.008, wall: 0.001 },
  copperGrade: 'cu-etp',
  copperTemperatureC: 40,
  leads: null,
  handing: {
    windingDirection: null,
    leadExit: null,
    leadAngleDeg: null,
    upEnd: null,
    firstTurnFromFace: null,
  },
  diameterTolerance: null,
  pitchTolerance: null,
  support: { kind: 'none', count: 0 },
  centreTap: false,
  insulation: { kind: 'none', thickness: 0 },
  waterCircuits: 1,
};

const part: Workpiece = {
  material: { kind: 'library', id: 'steel-c45' },
  form: 'cylinder',
  outsideDiameter: 0.04,
  insideDiameter: 0,
  length: 0.08,
  diameterTolerance: null,
  weighedMass: null,
  heatedLength: null,
  depthWanted: null,
  axialOffset: 0,
  runout: null,
  rotation: false,
};

const query: ImpedanceQuery = {
  coil,
  part,
  frequency: 2e4,
  state: 'cold',
  startTemperatureC: 20,
  targetTemperatureC: 900,
  current: 300,
  includeLeads: false,
  setting: 'preview',
};

function refusal(change: Partial<ImpedanceQuery>): { code: string; field: string } {
  try {
    solveImpedance({ ...query, ...change });
  } catch (error) {
    if (error instanceof InductionInputError) return { code: error.code, field: error.field };
    throw error;
  }
  throw new Error('was not refused');
}

describe('solveImpedance', () => {
  it('separates the heat of the part from that of the copper', () => {
    const bare = solveImpedance({ ...query, part: null });
    const loaded = solveImpedance(query);
    expect(bare.loadResistance).toBe(0);
    expect(loaded.loadResistance).toBeGreaterThan(0);
    expect(loaded.efficiency).toBeCloseTo(loaded.loadResistance / loaded.resistance, 12);
    expect(loaded.turnLossShare).toHaveLength(4);
    expect(loaded.turnVoltage[0]).toBeCloseTo(loaded.turnVoltage[3] ?? 0, 9);
  });

  it('saturates steel: more current, less inductance', () => {
    const at = (current: number) => solveImpedance({ ...query, current }).inductance;
    expect(at(30)).toBeGreaterThan(at(300));
    expect(at(300)).toBeGreaterThan(at(3000));
  });

  it('finds a hot layer between cold and through-hot', () => {
    const hot = solveImpedance({ ...query, state: 'hot' });
    const layer = solveImpedance({ ...query, state: 'hot', part: { ...part, depthWanted: 0.002 } });
    const cold = solveImpedance(query);
    expect(hot.inductance).not.toBeCloseTo(cold.inductance, 8);
    expect(layer.loadResistance).toBeGreaterThan(Math.min(hot.loadResistance, cold.loadResistance) * 0.9);
    expect(layer.assumptions.join(' ')).toContain('layer');
  });

  it('gives bare figures with a remark for coils that are not round', () => {
    const answer = solveImpedance({
      ...query,
      coil: { ...coil, winding: { shape: 'hairpin', length: 0.2, legGap: 0.02, turns: 1, pitch: 0.011 } },
    });
    expect(answer.loadResistance).toBe(0);
    expect(answer.assumptions.join(' ')).toContain('without its part');
  });

  it('takes a second frequency of the same coil from the same geometry', () => {
    const prepared = prepareCoil(coil, part, 'preview');
    const a = impedanceAt(prepared, query);
    const b = impedanceAt(prepared, { ...query, frequency: 4e4 });
    expect(b.resistance).toBeGreaterThan(a.resistance);
    expect(a).toEqual(solveImpedance(query));
  });

  it.each([
    [{ frequency: Number.NaN }, 'not-a-number', 'frequency'],
    [{ frequency: -1 }, 'not-positive', 'frequency'],
    [{ current: Number.POSITIVE_INFINITY }, 'not-a-number', 'current'],
    [{ part: { ...part, outsideDiameter: 0.0499 } }, 'part-overlaps-coil', 'part.outsideDiameter'],
    [{ part: { ...part, insideDiameter: 0.04 } }, 'out-of-range', 'part.insideDiameter'],
    [
      { coil: { ...coil, tube: { kind: 'round', outsideDiameter: 0.008, wall: 0.005 } } },
      'section-impossible',
      'coil.tube.wall',
    ],
    [
      { part: { ...part, material: { kind: 'library', id: 'wood' } } },
      'unknown-material',
      'part.material.id',
    ],
    [{ startTemperatureC: 1e6 }, 'out-of-range', 'process.startTemperatureC'],
  ] as [Partial<ImpedanceQuery>, string, string][])('refuses %j as %s', (change, code, field) => {
    expect(refusal(change)).toEqual({ code, field });
  });

  it('does not take a number that is none for one not known', () => {
    const winding = {
      shape: 'helix' as const,
      insideDiameter: null,
      clearance: 0.005,
      turns: 4,
      pitch: 0.011,
    };
    expect(solveImpedance({ ...query, coil: { ...coil, winding } }).inductance).toBeGreaterThan(0);
    expect(refusal({ coil: { ...coil, winding: { ...winding, insideDiameter: Number.NaN } } }).code).toBe(
      'not-a-number',
    );
  });

  it('refuses open turns, touching turns and drawings', () => {
    const winding = {
      shape: 'helix' as const,
      insideDiameter: 0.05,
      clearance: null,
      turns: 4,
      pitch: 0.011,
    };
    const of = (change: object) =>
      refusal({ coil: { ...coil, winding: { ...winding, ...change } as Coil['winding'] } }).code;
    expect(of({ turns: null })).toBe('turns-open');
    expect(of({ pitch: 0.0081 })).toBe('turns-overlap');
    expect(of({ shape: 'drawing', note: '' })).toBe('outside-method');
    expect(of({ insideDiameter: 50 })).toBe('out-of-range');
  });

  it('answers with finite numbers or refuses, whatever is typed', () => {
    const size = fc.oneof(
      { weight: 8, arbitrary: fc.double({ min: 1e-4, max: 0.3, noNaN: true }) },
      fc.constantFrom(0, -0.01, Number.NaN, Number.POSITIVE_INFINITY, 1e-9, 25.4, 1e12),
    );
    const count = fc.oneof(
      { weight: 8, arbitrary: fc.integer({ min: 1, max: 6 }) },
      fc.constantFrom(0, -3, 2.5, 1e9, Number.NaN),
    );
    const winding = fc.oneof(
      fc.record({
        shape: fc.constant('helix' as const),
        insideDiameter: size,
        clearance: fc.constant(null),
        turns: count,
        pitch: size,
      }),
      fc.record({
        shape: fc.constant('conical' as const),
        insideDiameter: size,
        endInsideDiameter: size,
        turns: count,
        pitch: size,
      }),
      fc.record({
        shape: fc.constant('stepped' as const),
        insideDiameters: fc.array(size, { maxLength: 5 }),
        pitch: size,
      }),
      fc.record({
        shape: fc.constant('pancake' as const),
        insideDiameter: size,
        turns: count,
        pitch: size,
        faceGap: size,
      }),
      fc.record({
        shape: fc.constant('bore' as const),
        outsideDiameter: size,
        clearance: size,
        turns: count,
        pitch: size,
      }),
      fc.record({
        shape: fc.constant('racetrack' as const),
        insideLength: size,
        insideWidth: size,
        cornerRadius: size,
        turns: count,
        pitch: size,
      }),
      fc.record({
        shape: fc.constant('channel' as const),
        insideLength: size,
        insideWidth: size,
        crossingHeight: size,
        turns: count,
        pitch: size,
      }),
    );
    const tube = fc.oneof(
      fc.record({ kind: fc.constant('round' as const), outsideDiameter: size, wall: size }),
      fc.record({
        kind: fc.constant('rectangular' as const),
        axialWidth: size,
        radialHeight: size,
        wall: size,
        cornerRadius: size,
      }),
    );
    fc.assert(
      fc.property(
        winding,
        tube,
        size,
        size,
        size,
        size,
        fc.double({ min: 1, max: 7, noNaN: true }),
        (w, t, od, id, length, offset, logF) => {
          const q = {
            ...query,
            frequency: 10 ** logF,
            coil: { ...coil, winding: w, tube: t, leads: { length: 0.1, spacing: 0.05 } },
            part: {
              ...part,
              material: { kind: 'library' as const, id: 'stainless-304' },
              outsideDiameter: od,
              insideDiameter: id,
              length,
              axialOffset: offset,
            },
            includeLeads: true,
          };
          for (const p of [q.part, null]) {
            try {
              const answer = solveImpedance({ ...q, part: p });
              expect(answer.inductance).toBeGreaterThan(0);
              expect(answer.resistance).toBeGreaterThan(0);
              expect(Number.isFinite(answer.inductance + answer.resistance + answer.loadResistance)).toBe(
                true,
              );
            } catch (error) {
              if (!(error instanceof InductionInputError)) throw error;
              expect(error.message.length).toBeGreaterThan(10);
            }
          }
        },
      ),
      { numRuns: 400, seed: 7 },
    );
  }, 60_000);
});

describe('fluxDensityAt', () => {
  it('is the field of rings at low frequency, on and off the axis', () => {
    const prepared = prepareCoil(
      { ...coil, winding: { shape: 'helix', insideDiameter: 0.05, clearance: null, turns: 8, pitch: 0.009 } },
      null,
      'default',
    );
    const block = blockAt(prepared, 10);
    const field = solveField(block, []);
    for (const z of [0, 0.1, 0.3]) {
      let expected = 0;
      for (const ring of prepared.rings.rings) {
        expected += (2e-7 * Math.PI * ring.radius ** 2) / (ring.radius ** 2 + (z - ring.z) ** 2) ** 1.5;
      }
      expect(Math.abs(fluxDensityAt(block, field, 0, z).magnitude / expected - 1)).toBeLessThan(0.01);
      expect(Math.abs(fluxDensityAt(block, field, 1e-3, z).magnitude / expected - 1)).toBeLessThan(0.015);
    }
  });

  it('is lower in the shadow of a good conductor', () => {
    const disc: Workpiece = {
      ...part,
      material: { kind: 'library', id: 'cu-etp' },
      form: 'disc',
      outsideDiameter: 0.2,
      length: 0.005,
      axialOffset: 0.06,
    };
    const with_ = prepareCoil(coil, disc, 'default');
    const without = prepareCoil(coil, null, 'default');
    const free = fluxDensityAt(
      blockAt(without, 2e4),
      solveField(blockAt(without, 2e4), []),
      0.01,
      0.1,
    ).magnitude;
    // A perfect screen: no field enters, E = 0 on its surface.
    const block = blockAt(with_, 2e4);
    const load = block.geometry.loads[0];
    const size = load?.count ?? 0;
    const zero = {
      rows: size,
      cols: size,
      re: new Float64Array(size * size),
      im: new Float64Array(size * size),
    };
    const screened = fluxDensityAt(block, solveField(block, [zero]), 0.01, 0.1).magnitude;
    expect(screened).toBeLessThan(0.3 * free);
  });
});
