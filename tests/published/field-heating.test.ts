/**
 * Heating: conduction alone against cases F-01 and F-03 (Chebyshev collocation, Radau; infinite cylinder
 * with the eddy-current source of a given surface power), then the coupled run's own laws.
 */
import { describe, expect, it } from 'vitest';
import { InductionInputError } from '../../src/lib/induction/input-error.ts';
import {
  conductionState,
  conductionStep,
  surfaceTemperature,
} from '../../src/lib/induction/heating/conduction.ts';
import { runHeating } from '../../src/lib/induction/heating/run-heating.ts';
import type { HeatingInput, HeatingPoint } from '../../src/lib/induction/heating/types.ts';
import { plainCoil } from './support/plain-coil.ts';
import { check, solvedElsewhere } from './support/published-check.ts';
import { input, solvedCase, type SolvedCase } from './support/reference-values.ts';

/** |I1((1+j)·x)|² by its power series, x = r/δ up to about 10. */
function currentSquared(x: number): number {
  // z = (1+j)x; I1 = Σ (z/2)^(2k+1)/(k!(k+1)!); z² = 2j·x².
  let re = x / 2;
  let im = x / 2;
  let sumR = re;
  let sumI = im;
  for (let k = 1; k < 80; k++) {
    const f = (x * x) / 2 / (k * (k + 1));
    const t = -im * f;
    im = re * f;
    re = t;
    sumR += re;
    sumI += im;
  }
  return sumR * sumR + sumI * sumI;
}

function list(c: SolvedCase, from: 'inputs' | 'expected', name: string): number[] {
  const value = c[from][name];
  if (!Array.isArray(value)) throw new Error(`${c.id} has no list ${name}`);
  return value;
}

describe('conduction in an infinite cylinder with an eddy-current source', () => {
  it.each(['F-01', 'F-03'])('%s', (id) => {
    const c = solvedCase(id);
    const radius = input(c, 'diameter_m') / 2;
    const delta = input(c, 'skin_depth_m');
    const ambient = input(c, 'ambient_C');
    const cells = 24;
    // Finer towards the surface, as the heating run's own grid.
    const r = Float64Array.from({ length: cells + 1 }, (_, k) => radius * (1 - (1 - k / cells) ** 1.6));
    const transfer = {
      convection: input(c, 'convection_coefficient_W_per_m2K'),
      emissivity: input(c, 'emissivity'),
    };
    const sides = { inner: null, outer: transfer, low: null, high: null };
    const state = conductionState({ r, z: Float64Array.of(0, 1), sides }, input(c, 'initial_C'));
    const k = input(c, 'thermal_conductivity_W_per_mK');
    const heat = input(c, 'specific_heat_J_per_kgK');
    const material = {
      density: input(c, 'density_kg_per_m3'),
      enthalpy: (t: number) => heat * t,
      conductivity: () => k,
    };
    const source = new Float64Array(cells);
    let total = 0;
    for (let i = 0; i < cells; i++) {
      const a = r[i] ?? 0;
      const b = r[i + 1] ?? 0;
      for (let q = 0; q < 8; q++) {
        const x = a + ((b - a) * (q + 0.5)) / 8;
        source[i] = (source[i] ?? 0) + currentSquared(x / delta) * 2 * Math.PI * x * ((b - a) / 8);
      }
      total += source[i] ?? 0;
    }
    const power = input(c, 'surface_power_density_W_per_m2') * 2 * Math.PI * radius;
    for (let i = 0; i < cells; i++) source[i] = ((source[i] ?? 0) * power) / total;
    let time = 0;
    for (const [n, at] of list(c, 'inputs', 'times_s').entries()) {
      const span = at - time;
      const steps = Math.max(8, Math.ceil(span / (at / 40)));
      for (let s = 0; s < steps; s++) {
        const next = conductionStep(state, material, source, span / steps, ambient);
        if (next === null) throw new Error('the step did not settle');
        state.temperature.set(next.temperature);
      }
      time = at;
      const volume = state.volume.reduce((sum, v) => sum + v, 0);
      const mean = state.temperature.reduce((sum, t, i) => sum + t * (state.volume[i] ?? 0), 0) / volume;
      const half = ((r[cells] ?? 0) - (r[cells - 1] ?? 0)) / 2;
      const edge = surfaceTemperature(state.temperature[cells - 1] ?? 0, half, transfer, k, ambient);
      for (const [name, value] of [
        ['surface_temperature_C', edge],
        ['mean_temperature_C', mean],
        ['centre_temperature_C', state.temperature[0] ?? 0],
      ] as const) {
        const expected = list(c, 'expected', name)[n] ?? Number.NaN;
        // Two per cent of the temperature rise of the surface.
        const rise = (list(c, 'expected', 'surface_temperature_C')[n] ?? 0) - input(c, 'initial_C');
        check('heating', {
          id: `${id} ${at} s`,
          quantity: name,
          source: `${c.method}; ${c.tool}`,
          standing: solvedElsewhere,
          value,
          expected,
          tolerance: { abs: 0.02 * rise },
        });
      }
    }
  });

  it('keeps the energy exactly', () => {
    const sides = { inner: null, outer: { convection: 50, emissivity: 0.8 }, low: null, high: null };
    const state = conductionState(
      { r: Float64Array.of(0, 0.005, 0.009, 0.01), z: Float64Array.of(0, 0.01, 0.02), sides },
      20,
    );
    const peaked = {
      density: 7850,
      enthalpy: (t: number) => 500 * t + 60_000 / (1 + Math.exp(-(t - 300) / 3)),
      conductivity: (t: number) => 50 - 0.03 * t,
    };
    const before = state.temperature.map((t) => peaked.enthalpy(t));
    const source = Float64Array.of(1, 2, 60, 3, 2, 80);
    let lost = 0;
    const dt = 0.5;
    for (let s = 0; s < 60; s++) {
      const next = conductionStep(state, peaked, source, dt, 20);
      if (next === null) throw new Error('the step did not settle');
      state.temperature.set(next.temperature);
      lost += next.loss * dt;
    }
    const stored = state.temperature.reduce(
      (sum, t, i) => sum + 7850 * (state.volume[i] ?? 0) * (peaked.enthalpy(t) - (before[i] ?? 0)),
      0,
    );
    const put = source.reduce((sum, q) => sum + q, 0) * 30;
    expect(Math.abs((stored + lost) / put - 1)).toBeLessThan(1e-3);
  });
});

const heated: HeatingInput = {
  coil: plainCoil({
    winding: { shape: 'helix', insideDiameter: 0.03, clearance: null, turns: 5, pitch: 0.01 },
    outsideDiameter: 0.008,
  }),
  part: {
    material: { kind: 'library', id: 'steel-c45' },
    form: 'cylinder',
    outsideDiameter: 0.02,
    insideDiameter: 0,
    length: 0.08,
    diameterTolerance: null,
    weighedMass: null,
    heatedLength: null,
    depthWanted: null,
    axialOffset: 0,
    runout: null,
    rotation: false,
  },
  drive: { kind: 'current', current: 300 },
  frequency: { kind: 'fixed', frequency: 2e4 },
  fixedInductance: 0,
  fixedResistance: 0,
  includeLeads: false,
  startTemperatureC: 20,
  ambientTemperatureC: 20,
  time: 10,
  targetTemperatureC: null,
  materialHotTemperatureC: 900,
  convection: 10,
  emissivity: null,
  setting: 'preview',
};

describe('coupled heating', () => {
  it('balances energy and keeps what the drive promises', () => {
    for (const drive of [
      { kind: 'current', current: 300 },
      { kind: 'power', power: 3000 },
      { kind: 'voltage', voltage: 20 },
    ] as const) {
      const result = runHeating({ ...heated, time: 4, drive });
      expect(result.end).toBe('time');
      expect(Math.abs(result.balance.closure)).toBeLessThan(1e-4);
      const held = (p: HeatingPoint) =>
        drive.kind === 'current' ? p.current : drive.kind === 'power' ? p.totalPower : p.voltage;
      for (const p of result.curve) {
        expect(Math.abs(held(p) / held(result.curve[0] as HeatingPoint) - 1)).toBeLessThan(1e-9);
        expect(p.surfaceC).toBeGreaterThanOrEqual(p.coreC - 1e-6);
      }
    }
  });

  it('coarse and fine settings agree to two per cent of the rise', () => {
    const coarse = runHeating(heated).curve.at(-1) as HeatingPoint;
    const fine = runHeating({ ...heated, setting: 'default' }).curve.at(-1) as HeatingPoint;
    for (const key of ['surfaceC', 'meanC', 'coreC'] as const) {
      expect(Math.abs(coarse[key] - fine[key])).toBeLessThan(0.02 * (fine.surfaceC - 20));
    }
  });

  it('marks the Curie point, where the inductance falls', () => {
    const result = runHeating({ ...heated, drive: { kind: 'voltage', voltage: 25 }, time: 20 });
    expect(result.curieTemperatureC).toBe(760);
    expect(result.curieSurfaceTime).not.toBeNull();
    const highest = Math.max(...result.curve.map((p) => p.inductance));
    expect(result.curve.at(-1)?.inductance).toBeLessThan(0.9 * highest);
  });

  it('follows the tank: frequency times root LC stays', () => {
    const result = runHeating({
      ...heated,
      time: 5,
      frequency: { kind: 'tank', tank: 'series', capacitance: 1e-4 },
      fixedInductance: 1e-7,
    });
    for (const p of result.curve) {
      expect(Math.abs(p.frequency * 2 * Math.PI * Math.sqrt(p.inductance * 1e-4) - 1)).toBeLessThan(0.02);
    }
  });

  it('ends at the target, on request, and at the solidus', () => {
    const target = runHeating({ ...heated, time: 60, targetTemperatureC: 300 });
    expect(target.end).toBe('target');
    expect(target.curve.at(-1)?.surfaceC).toBeGreaterThanOrEqual(300);
    let calls = 0;
    const shares: number[] = [];
    const stopped = runHeating(heated, {
      shouldStop: () => ++calls > 5,
      onProgress: (share) => shares.push(share),
    });
    expect(stopped.end).toBe('stopped');
    expect(shares.length).toBe(5);
    const aluminium = { ...heated.part, material: { kind: 'library' as const, id: 'aluminium-6061' } };
    const melted = runHeating({
      ...heated,
      part: aluminium,
      drive: { kind: 'power', power: 30e3 },
      time: 100,
    });
    expect(melted.end).toBe('melting');
    expect(melted.curve.length).toBeLessThanOrEqual(400);
  });

  it('refuses what cannot be computed with the field it is about', () => {
    const cases: [Partial<HeatingInput>, string][] = [
      [{ time: Number.NaN }, 'time'],
      [{ time: -1 }, 'time'],
      [{ drive: { kind: 'power', power: 0 } }, 'drive.power'],
      [{ emissivity: 2 }, 'emissivity'],
      [{ frequency: { kind: 'fixed', frequency: 0 } }, 'frequency.frequency'],
    ];
    for (const [change, field] of cases) {
      let caught: unknown = null;
      try {
        runHeating({ ...heated, ...change });
      } catch (error) {
        caught = error;
      }
      expect(caught).toBeInstanceOf(InductionInputError);
      expect((caught as InductionInputError).field).toBe(field);
    }
  });
});
