import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { solveImpedance } from '../field/solve-impedance.ts';
import { circuitState, type TankCircuit } from '../tank/circuit.ts';
import { checkRequirement, CheckStoppedError } from './check-requirement.ts';
import { exampleRequirement } from './examples.ts';
import { examine } from './examine.ts';
import { plainRequirement } from './findings/case-context.ts';
import { circuitOf, rowSettings, solveRow } from './ladder.ts';
import { arrangements } from '../tank/bank.ts';
import type { CheckResult, Requirement } from './types.ts';

const preview = { setting: 'preview', bands: false } as const;
const plain = checkRequirement(plainRequirement(), { setting: 'preview' });
const fittedOf = (check: CheckResult) => check.ladder.find((row) => row.fitted);

/** Every number in a result. */
function numbers(value: unknown): number[] {
  if (typeof value === 'number') return [value];
  if (Array.isArray(value)) return value.flatMap(numbers);
  return value !== null && typeof value === 'object' ? Object.values(value).flatMap(numbers) : [];
}

describe('the check', () => {
  it('finds no blocker and no caution in the example', () => {
    const result = checkRequirement(exampleRequirement(), preview);
    expect(result.findings.filter((one) => one.severity !== 'note').map((one) => one.message)).toEqual([]);
    expect(result.ladder.filter((row) => row.fitted)).toHaveLength(1);
    expect(result.ladder.filter((row) => row.advised)).toHaveLength(1);
  });

  it('gives only finite numbers', () => {
    expect(numbers(plain).every(Number.isFinite)).toBe(true);
    expect(JSON.stringify(plain).length).toBeLessThan(256 * 1024);
  });

  it('gives the same result twice', () => {
    expect(checkRequirement(plainRequirement(), preview)).toEqual(
      checkRequirement(plainRequirement(), preview),
    );
  });

  it('lets the losses and the part’s power add up to what leaves the inverter', () => {
    const [inverter, ...others] = plain.chain;
    const sum = others.reduce((total, step) => total + step.power.value, 0);
    expect(sum / (inverter?.power.value ?? 0)).toBeCloseTo(1, 9);
    expect(plain.chain.map((step) => step.name)).toEqual([
      'inverter',
      'bank',
      'transformer',
      'bus',
      'leads',
      'coil',
      'part',
    ]);
  });

  it('puts every figure inside its band and names at most three contributors', () => {
    const figures = [plain.cold, plain.hot, plain.tank, plain.bare].flatMap((group) =>
      Object.values(group ?? {}).filter((one) => typeof one === 'object' && one !== null && 'low' in one),
    ) as { value: number; low: number; high: number; contributors: unknown[] }[];
    expect(figures.length).toBeGreaterThan(15);
    for (const one of figures) {
      expect(one.low).toBeLessThanOrEqual(one.value);
      expect(one.high).toBeGreaterThanOrEqual(one.value);
      expect(one.contributors.length).toBeLessThanOrEqual(3);
    }
    expect(plain.tank?.operatingFrequency.contributors[0]?.name).toBeTruthy();
  });

  it('lowers the frequency with more capacitance on every tap', () => {
    for (const tap of new Set(plain.ladder.map((row) => row.tap))) {
      const rows = plain.ladder.filter((row) => row.tap === tap);
      for (let i = 1; i < rows.length; i++) {
        expect(rows[i]?.hot.frequency.value).toBeLessThan(rows[i - 1]?.hot.frequency.value ?? 0);
        expect(rows[i]?.cold.frequency.value).toBeLessThan(rows[i - 1]?.cold.frequency.value ?? 0);
      }
    }
  });

  it('agrees on every row within 0.05 % with the field solution at that row', () => {
    const requirement = plainRequirement();
    requirement.part.depthWanted = null;
    const context = examine(requirement, { setting: 'default', bands: false });
    const { models, geometry } = context;
    if (!models) throw new Error('the example is inside the method');
    for (const setting of rowSettings(models.assumed, arrangements(requirement.machine.bank))) {
      const row = solveRow(models.assumed, setting, models.states, models.startFrequency);
      for (const state of ['cold', 'hot'] as const) {
        const point = row?.points[state];
        if (!point) throw new Error('every row resonates');
        const direct = solveImpedance({
          coil: geometry.coil,
          part: geometry.part,
          frequency: point.frequency,
          state,
          startTemperatureC: requirement.process.startTemperatureC,
          targetTemperatureC: requirement.process.targetTemperatureC,
          current: point.current,
          includeLeads: true,
          setting: 'default',
        });
        expect(Math.abs(point.point.inductance / direct.inductance - 1)).toBeLessThan(5e-4);
        expect(
          Math.abs((point.point.coilResistance + point.point.loadResistance) / direct.resistance - 1),
        ).toBeLessThan(5e-4);
      }
    }
  });

  it('delivers the least of rated power, voltage limit and current limit', () => {
    const row = fittedOf(plain);
    const { supply } = plainRequirement().machine;
    for (const state of [row?.cold, row?.hot]) {
      expect(state?.deliverablePower.value).toBeLessThanOrEqual((supply.ratedPower ?? 0) * (1 + 1e-9));
      expect(state?.inverterVoltage).toBeLessThanOrEqual((supply.voltageLimit ?? 0) * (1 + 1e-9));
      expect(state?.inverterCurrent).toBeLessThanOrEqual((supply.currentLimit ?? 0) * (1 + 1e-9));
    }
  });

  it('keeps coil current and deliverable power of a magnetic part consistent', () => {
    const context = examine(exampleRequirement(), preview);
    const row = context.fittedRow;
    if (!row || !context.models) throw new Error('the example is inside the method');
    const point = row.points.cold;
    const at = context.models.states.cold.model.at(point.frequency, point.state.coilCurrent);
    expect(at.loadResistance / point.point.loadResistance).toBeCloseTo(1, 4);
    const circuit: TankCircuit = circuitOf(context.models.assumed, row.setting);
    const again = circuitState(
      circuit,
      { inductance: at.inductance, resistance: at.coilResistance + at.loadResistance },
      point.frequency,
      point.deliverable.power,
    );
    expect(again.coilCurrent / point.state.coilCurrent).toBeCloseTo(1, 4);
  });

  it('has a frequency band near what a Monte-Carlo run over the tolerances gives', () => {
    const requirement = plainRequirement();
    const frequencies: number[] = [];
    let seed = 7;
    const uniform = () => {
      seed = (seed * 48271) % 2147483647;
      return seed / 2147483647;
    };
    // Normal deviates of one half band: the quadrature sum is then the spread.
    const normal = () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
    for (let i = 0; i < 40; i++) {
      const r = plainRequirement();
      const { winding } = r.coil;
      if (winding.shape !== 'helix' || winding.insideDiameter === null || r.machine.bank.kind !== 'groups')
        throw new Error('helix on groups');
      winding.insideDiameter += (requirement.coil.diameterTolerance ?? 0) * normal();
      winding.pitch += (requirement.coil.pitchTolerance ?? 0) * normal();
      r.machine.fixed.inductance =
        (r.machine.fixed.inductance ?? 0) * (1 + (r.machine.fixed.inductanceBand ?? 0) * normal());
      for (const group of r.machine.bank.groups) group.unitCapacitance *= 1 + group.tolerance * normal();
      frequencies.push(checkRequirement(r, preview).tank?.resonanceHot.value ?? Number.NaN);
    }
    const mean = frequencies.reduce((a, b) => a + b, 0) / frequencies.length;
    const spread = Math.sqrt(frequencies.reduce((a, b) => a + (b - mean) ** 2, 0) / frequencies.length);
    const figure = plain.tank?.resonanceHot;
    const half = ((figure?.high ?? 0) - (figure?.low ?? 0)) / 2;
    // The figure also carries part, leakage and method; forty draws know the spread to a ninth.
    expect(half / spread).toBeGreaterThan(0.8);
    expect(half / spread).toBeLessThan(1.5);
  }, 60_000);

  it('reports progress and stops when asked', () => {
    const shares: number[] = [];
    checkRequirement(plainRequirement(), { ...preview, onProgress: (share) => shares.push(share) });
    expect(shares.at(-1)).toBe(1);
    expect([...shares].sort((a, b) => a - b)).toEqual(shares);
    expect(() => checkRequirement(plainRequirement(), { ...preview, shouldStop: () => true })).toThrow(
      CheckStoppedError,
    );
  });
});

describe('what cannot be computed', () => {
  const change = (work: (r: Requirement) => void) => {
    const r = plainRequirement();
    work(r);
    return checkRequirement(r, preview);
  };
  const codes = (check: CheckResult) => check.findings.map((one) => one.code);

  it('gives bare figures and a caution for a racetrack, and no ladder', () => {
    const check = change((r) => {
      r.coil.winding = {
        shape: 'racetrack',
        insideLength: 0.12,
        insideWidth: 0.05,
        cornerRadius: 0.025,
        turns: 3,
        pitch: 0.013,
      };
    });
    expect(check.bare?.inductance.value).toBeGreaterThan(1e-7);
    expect([check.cold, check.tank]).toEqual([null, null]);
    expect(check.ladder).toEqual([]);
    expect(codes(check)).toContain('outside-method');
    expect(check.findings.some((one) => one.severity === 'blocker')).toBe(false);
    expect(check.shop?.developedLength.value).toBeGreaterThan(0.8);
  });

  it('gives bare figures for a part that does not conduct, and blocks', () => {
    const check = change((r) => {
      r.part.material = {
        kind: 'own',
        own: {
          name: 'Glass',
          resistivity20: null,
          resistivityHot: null,
          relativePermeability: 1,
          saturationFluxDensity: null,
          curieTemperatureC: null,
          density: 2500,
          specificHeat: 800,
          thermalConductivity: 1,
          emissivity: null,
          solidusC: null,
        },
      };
    });
    expect(check.bare).not.toBeNull();
    expect(check.hot).toBeNull();
    expect(codes(check)).toContain('part-does-not-couple');
  });

  it('takes a setting for the fitted one where none is marked, and says so', () => {
    const check = change((r) => {
      if (r.machine.bank.kind === 'groups' && r.machine.bank.groups[0]) r.machine.bank.groups[0].fitted = 0;
    });
    expect(check.ladder.filter((row) => row.fitted)).toHaveLength(1);
    const said = check.findings.find((one) => one.code === 'assumed-value' && one.subject === 'machine.bank');
    expect(said?.message).toContain('bank setting fitted now is not known');
  });

  it('asks for turns that are open', () => {
    const check = change((r) => {
      if (r.coil.winding.shape === 'helix') r.coil.winding.turns = null;
    });
    expect(check.resolved).toBeNull();
    expect(codes(check)).toContain('turns-open');
  });

  it('units of no capacitance give findings and no not-a-number', () => {
    const check = change(
      (r) =>
        r.machine.bank.kind === 'groups' &&
        r.machine.bank.groups[0] &&
        (r.machine.bank.groups[0].unitCapacitance = 0),
    );
    expect(numbers({ ...check, findings: [] }).every(Number.isFinite)).toBe(true);
    expect(check.findings.map((finding) => finding.code)).toContain('unit-doubt');
  });

  it('never throws and never gives a silent number, whatever the sizes', () => {
    const sizes = fc.constantFrom(Number.NaN, -1, 0, 1e-9, 1e-4, 0.01, 0.05, 3, 1e6, Infinity);
    const paths: ((r: Requirement, v: number) => void)[] = [
      (r, v) => (r.part.outsideDiameter = v),
      (r, v) => (r.part.insideDiameter = v),
      (r, v) => (r.part.length = v),
      (r, v) => r.coil.winding.shape === 'helix' && (r.coil.winding.insideDiameter = v),
      (r, v) => r.coil.winding.shape === 'helix' && (r.coil.winding.pitch = v),
      (r, v) => r.coil.winding.shape === 'helix' && (r.coil.winding.turns = v),
      (r, v) => r.coil.tube.kind === 'round' && (r.coil.tube.outsideDiameter = v),
      (r, v) => (r.coil.tube.wall = v),
      (r, v) => r.coil.leads && (r.coil.leads.length = v),
      (r, v) => r.coil.leads && (r.coil.leads.spacing = v),
      (r, v) => (r.machine.supply.voltageLimit = v),
      (r, v) => (r.machine.supply.ratedPower = v),
      (r, v) => (r.machine.water.flow = v),
      (r, v) =>
        r.machine.bank.kind === 'groups' &&
        r.machine.bank.groups[0] &&
        (r.machine.bank.groups[0].unitCapacitance = v),
      (r, v) => r.machine.transformer && (r.machine.transformer.ratios = [v]),
      (r, v) => (r.part.depthWanted = v),
      (r, v) => (r.process.targetTemperatureC = v),
      (r, v) => (r.coil.copperTemperatureC = v),
    ];
    fc.assert(
      fc.property(fc.constantFrom(...paths), sizes, (set, value) => {
        const check = change((r) => set(r, value));
        expect(numbers({ ...check, findings: [] }).every(Number.isFinite)).toBe(true);
        if (check.hot === null) expect(check.findings.length).toBeGreaterThan(0);
      }),
      { numRuns: 60 },
    );
  }, 60_000);
});
