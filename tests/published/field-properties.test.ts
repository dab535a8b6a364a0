/**
 * What must hold whatever the numbers: scaling, the square of turns, reciprocity, power balance, mirror
 * symmetry, exact elimination. Laws of linear magnetoquasistatics (any text on electromagnetic fields);
 * no reference value is needed.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { partBody, ringCoil } from '../../src/lib/induction/coil/rings.ts';
import { MU0, skinDepth } from '../../src/lib/induction/constants/physical.ts';
import { coilBlock, prepareUpdates, solveField } from '../../src/lib/induction/field/coil-block.ts';
import { complexMatrix, solveFactored } from '../../src/lib/induction/field/complex-dense.ts';
import { prepareGeometry, resolutionOf } from '../../src/lib/induction/field/field-geometry.ts';
import { POINTS_PER_ELEMENT, solveLoad } from '../../src/lib/induction/field/load-operator.ts';
import { solveImpedance } from '../../src/lib/induction/field/solve-impedance.ts';
import { plainCoil } from './support/plain-coil.ts';
import { elementsOf, helix, roundSection, solveCase, type PlainCase } from './support/field-cases.ts';

const COPPER = 1.85e-8;

function sample(scale: number, turns = 4): PlainCase {
  return {
    coil: helix(turns, 0.03 * scale, 0.011 * scale, roundSection(0.008 * scale, 0.001 * scale)),
    copper: COPPER * scale * scale,
    frequency: 2e4,
    part: {
      outerRadius: 0.02 * scale,
      innerRadius: 0.005 * scale,
      low: -0.02 * scale,
      high: 0.035 * scale,
      resistivity: 4e-7 * scale * scale,
      permeability: 5,
    },
  };
}

describe('properties of the field solution', () => {
  it('inductance and resistance scale with size when skin depths scale too', () => {
    const one = solveCase(sample(1), 'default');
    fc.assert(
      fc.property(fc.double({ min: 0.3, max: 4, noNaN: true }), (s) => {
        const other = solveCase(sample(s), 'default');
        expect(Math.abs(other.inductance / (s * one.inductance) - 1)).toBeLessThan(1e-6);
        expect(Math.abs(other.resistance / (s * one.resistance) - 1)).toBeLessThan(1e-6);
      }),
      { numRuns: 8, seed: 4 },
    );
  });

  it('inductance grows as the square of the turns in one envelope', () => {
    // Thin tubes filling the same length alike: the current sheet is the same.
    const length = 0.12;
    const of = (n: number) => {
      const pitch = length / n;
      const coil = helix(n, 0.05, pitch, roundSection(0.7 * pitch, 0.15 * pitch));
      return solveCase({ coil, copper: COPPER, frequency: 1e9, part: null }, 'default').inductance;
    };
    const per10 = of(10) / 100;
    const per20 = of(20) / 400;
    const per40 = of(40) / 1600;
    // What is left is the end turns' share, which falls as 1/N.
    expect(Math.abs(per40 / per20 - 1)).toBeLessThan(0.04);
    expect(Math.abs(per40 - per20)).toBeLessThan(0.6 * Math.abs(per20 - per10));
  });

  it('the voltage turn k takes from a current in turn l equals the reverse', () => {
    const coil = {
      ...helix(3, 0.03, 0.012, roundSection(0.008, 0.001)),
      rings: [
        { radius: 0.025, z: -0.012 },
        { radius: 0.032, z: 0.001 },
        { radius: 0.028, z: 0.015 },
      ],
    };
    const g = prepareGeometry(coil, [], resolutionOf('default', coil, []));
    const block = coilBlock(g, COPPER, 2e4);
    const n = g.turnColumns;
    const x = complexMatrix(n + 3, 3);
    for (let t = 0; t < 3; t++) x.re[(n + t) * 3 + t] = 1;
    solveFactored(block.factors, x);
    for (let k = 0; k < 3; k++) {
      for (let l = 0; l < k; l++) {
        const a = Math.hypot(x.re[(n + k) * 3 + l] ?? 0, x.im[(n + k) * 3 + l] ?? 0);
        const b = Math.hypot(x.re[(n + l) * 3 + k] ?? 0, x.im[(n + l) * 3 + k] ?? 0);
        expect(Math.abs(a / b - 1)).toBeLessThan(1e-5);
      }
    }
  });

  it('the power that enters bodies is the power at the terminals to 1e-4', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 7 }),
        fc.double({ min: 1.15, max: 2.5, noNaN: true }),
        fc.double({ min: 0.002, max: 0.015, noNaN: true }),
        fc.double({ min: 2.5, max: 6, noNaN: true }),
        fc.double({ min: -0.02, max: 0.02, noNaN: true }),
        (turns, spacing, gap, logF, offset) => {
          const coil = helix(turns, 0.02 + gap + 0.004, 0.008 * spacing, roundSection(0.008, 0.001));
          const part = {
            outerRadius: 0.02,
            innerRadius: 0,
            low: offset - 0.03,
            high: offset + 0.03,
            resistivity: 9e-7,
            permeability: 1,
          };
          const s = solveCase({ coil, copper: COPPER, frequency: 10 ** logF, part }, 'default');
          expect(Math.abs(s.balance)).toBeLessThan(2e-4);
        },
      ),
      { numRuns: 25, seed: 11 },
    );
  });

  it('gives with mirror symmetry what it gives without', () => {
    for (const turns of [4, 5]) {
      const c = sample(1, turns);
      const part = c.part === null ? null : { ...c.part, low: -0.025, high: 0.025 };
      const symmetric = solveCase({ ...c, part }, 'default');
      // A shift of a billionth of a metre of one turn is no change of shape, but breaks the symmetry.
      const rings = c.coil.rings.map((ring, k) => (k === 0 ? { ...ring, z: ring.z + 2e-9 } : ring));
      const whole = solveCase({ ...c, part, coil: { ...c.coil, rings } }, 'default');
      expect(Math.abs(symmetric.inductance / whole.inductance - 1)).toBeLessThan(2e-5);
      expect(Math.abs(symmetric.resistance / whole.resistance - 1)).toBeLessThan(2e-4);
      expect(symmetric.turnPower[0]).toBeCloseTo(symmetric.turnPower[turns - 1] ?? 0, 12);
    }
  });

  it('eliminates the coil once for many states of the part without any difference', () => {
    const c = sample(1);
    if (c.part === null) throw new Error('no part');
    const g = prepareGeometry(c.coil, [c.part], resolutionOf('default', c.coil, [c.part]));
    const e = elementsOf(g, skinDepth(c.part.resistivity, c.frequency, c.part.permeability));
    const n = e.nr * e.nz;
    const z = solveLoad(
      e,
      c.frequency,
      new Float64Array(n).fill(c.part.resistivity),
      new Float64Array(POINTS_PER_ELEMENT * n).fill(5),
    ).z;
    const once = solveField(coilBlock(g, c.copper, c.frequency), [z]);
    const block = coilBlock(g, c.copper, c.frequency);
    prepareUpdates(block);
    const many = solveField(block, [z]);
    expect(Math.abs(many.resistance / once.resistance - 1)).toBeLessThan(1e-9);
    expect(Math.abs(many.reactance / once.reactance - 1)).toBeLessThan(1e-9);
  });

  it('solves a part cut in two bodies as it solves the whole', () => {
    // Two halves a hair apart carry azimuthal currents as one bar does.
    const coil = helix(3, 0.03, 0.012, roundSection(0.008, 0.001));
    const cut = 1e-5;
    const halves = [
      { outerRadius: 0.02, innerRadius: 0, low: -0.03, high: -cut },
      { outerRadius: 0.02, innerRadius: 0, low: cut, high: 0.03 },
    ];
    const rho = 9e-7;
    const f = 2e4;
    const g = prepareGeometry(coil, halves, resolutionOf('fine', coil, halves));
    const operators = g.loads.map((load) => {
      const e = elementsOf(g, skinDepth(rho, f), load.load);
      const n = e.nr * e.nz;
      return solveLoad(e, f, new Float64Array(n).fill(rho), new Float64Array(POINTS_PER_ELEMENT * n).fill(1))
        .z;
    });
    const two = solveField(coilBlock(g, COPPER, f), operators);
    const one = solveCase(
      {
        coil,
        copper: COPPER,
        frequency: f,
        part: {
          outerRadius: 0.02,
          innerRadius: 0,
          low: -0.03,
          high: 0.03,
          resistivity: rho,
          permeability: 1,
        },
      },
      'fine',
    );
    expect(Math.abs(two.reactance / one.reactance - 1)).toBeLessThan(5e-3);
    expect(Math.abs((two.partPower[0] ?? 0) + (two.partPower[1] ?? 0) - one.load)).toBeLessThan(
      0.02 * one.load,
    );
  });

  it('takes inductance away with a good conductor and adds it with a magnetic one', () => {
    const base = sample(1);
    if (base.part === null) throw new Error('no part');
    const bare = solveCase({ ...base, part: null }, 'default').inductance;
    const copper = solveCase(
      { ...base, part: { ...base.part, resistivity: 2e-8, permeability: 1 } },
      'default',
    );
    const ferrite = solveCase(
      { ...base, part: { ...base.part, resistivity: 1, permeability: 200 } },
      'default',
    );
    expect(copper.inductance).toBeLessThan(bare);
    expect(ferrite.inductance).toBeGreaterThan(bare);
    expect(ferrite.load).toBeLessThan(1e-3 * ferrite.resistance + 1e-4);
  });
});

describe('the face the checker uses', () => {
  const coil = plainCoil({
    winding: { shape: 'helix', insideDiameter: 0.05, clearance: null, turns: 4, pitch: 0.011 },
    outsideDiameter: 0.008,
  });
  const query = {
    coil,
    part: null,
    frequency: 2e4,
    state: 'cold' as const,
    startTemperatureC: 20,
    targetTemperatureC: 800,
    current: 300,
    includeLeads: false,
    setting: 'default' as const,
  };

  it('agrees with the field solution of the same rings', () => {
    const rings = ringCoil(coil, null);
    expect(rings.rings[0]?.radius).toBeCloseTo(0.029, 12);
    const answer = solveImpedance(query);
    const rho = 1.7241e-8 * (1 + 0.00393 * 20);
    const s = solveCase({ coil: rings, copper: rho, frequency: 2e4, part: null }, 'default');
    expect(Math.abs(answer.inductance / s.inductance - 1)).toBeLessThan(1e-6);
    expect(Math.abs(answer.resistance / s.resistance - 1)).toBeLessThan(1e-5);
    expect(answer.turnLossShare.reduce((sum, x) => sum + x, 0)).toBeCloseTo(1, 12);
  });

  it('adds about the lead pair for leads', () => {
    const leads = { length: 0.2, spacing: 0.03 };
    const bare = solveImpedance(query);
    const leaded = solveImpedance({ ...query, coil: { ...coil, leads }, includeLeads: true });
    const pair = 0.2 * (MU0 / Math.PI) * Math.acosh(0.03 / 0.008);
    expect(leaded.inductance - bare.inductance).toBeGreaterThan(0.8 * pair);
    expect(leaded.inductance - bare.inductance).toBeLessThan(2 * pair);
    expect(leaded.resistance).toBeGreaterThan(bare.resistance);
  });

  it('puts a part under a pancake by its face gap', () => {
    const pancake = plainCoil({
      winding: { shape: 'pancake', insideDiameter: 0.05, turns: 4, pitch: 0.01, faceGap: 0.005 },
      outsideDiameter: 0.008,
    });
    const part = {
      material: { kind: 'library' as const, id: 'stainless-304' },
      form: 'disc' as const,
      outsideDiameter: 0.12,
      insideDiameter: 0,
      length: 0.01,
      diameterTolerance: null,
      weighedMass: null,
      heatedLength: null,
      depthWanted: null,
      axialOffset: 0,
      runout: null,
      rotation: false,
    };
    const body = partBody(part, pancake, ringCoil(pancake, part));
    expect(body.low).toBeCloseTo(0.009, 12);
    expect(body.high).toBeCloseTo(0.019, 12);
  });
});
