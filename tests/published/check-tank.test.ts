/**
 * Tank, bank and push-pull drive against closed formulas, circuits solved with ngspice and nodal analysis. Sources are
 * named in reference/values.json and reference/finite-elements.json (families f, Rp, Q, pushpull; H).
 */
import { describe, expect, it } from 'vitest';
import { groupCapacitance } from '../../src/lib/induction/tank/bank.ts';
import {
  circuitState,
  inputImpedance,
  tankBranch,
  type TankCircuit,
} from '../../src/lib/induction/tank/circuit.ts';
import { pushPullPeakVoltage, pushPullTankVoltage } from '../../src/lib/induction/tank/push-pull.ts';
import {
  dampedFrequency,
  losslessFrequency,
  parallelZeroPhaseFrequency,
  resonance,
} from '../../src/lib/induction/tank/resonance.ts';
import { check, evaluated, solvedElsewhere } from './support/published-check.ts';
import { input, single, solvedCases, valuesOf, type ReferenceValue } from './support/reference-values.ts';

const subject = 'check-tank';
const plain: TankCircuit = {
  connection: 'parallel',
  choke: 0,
  ratio: 1,
  transformer: null,
  bankSide: 'primary',
  capacitance: 1e-6,
  lossTangent: 0,
  fixedInductance: 0,
  fixedResistance: 0,
};

function compare(v: ReferenceValue, value: number): void {
  const { id, quantity, source, standing, tolerance } = v;
  check(subject, { id, quantity, source, standing, tolerance, value, expected: single(v) });
}

/** The frequencies are printed to a whole hertz: half of one is rounding. */
const wholeHertz = (v: ReferenceValue): ReferenceValue => ({ ...v, tolerance: { abs: 0.51 } });

describe('resonance of a tank with loss', () => {
  it('has the lossless, damped and unity-power-factor frequencies of the formulas, from the circuit too', () => {
    for (const v of valuesOf('f_').map(wholeHertz)) {
      const l = input(v, 'L_uH') * 1e-6;
      const c = input(v, 'C_uF') * 1e-6;
      const r = v.id === 'f_res' ? 0 : input(v, 'R_ohm');
      if (v.id === 'f_res') {
        compare(v, losslessFrequency(l, c));
        compare(
          v,
          resonance({ ...plain, capacitance: c }, () => ({ inductance: l, resistance: 1e-9 }), 1e5).frequency,
        );
      } else if (v.id === 'f_damped') compare(v, dampedFrequency(l, c, r));
      else {
        compare(v, parallelZeroPhaseFrequency(l, c, r));
        compare(
          v,
          resonance({ ...plain, capacitance: c }, () => ({ inductance: l, resistance: r }), 1e5).frequency,
        );
      }
    }
    expect(valuesOf('f_')).toHaveLength(3);
  });

  it('has the dynamic resistance L/(CR) at its zero-phase frequency and the Q of ωL/R', () => {
    const coil = { inductance: 1.5e-6, resistance: 0.06 };
    const { frequency, lossless } = resonance(plain, () => coil, 1e5);
    for (const v of valuesOf('Rp_dyn')) compare(v, inputImpedance(plain, coil, frequency).re);
    for (const v of valuesOf('Q')) {
      const branch = tankBranch(plain, coil, lossless);
      compare(v, (2 * Math.PI * lossless * branch.inductance) / branch.resistance);
    }
    expect(frequency).toBeLessThan(lossless);
  });

  it('lies 1/(2Q²) below the lossless frequency at zero phase (common practice)', () => {
    for (const q of [10, 20, 50]) {
      const resistance = Math.sqrt(1.5e-6 / 1e-6) / q;
      const found = resonance(plain, () => ({ inductance: 1.5e-6, resistance }), 1e5);
      const value = 1 - found.frequency / found.lossless;
      check(subject, {
        id: `zero-phase-shift-${q}`,
        quantity: 'relative shift of the zero-phase frequency',
        source: 'series expansion of √(1 − 1/Q²)',
        standing: evaluated,
        value,
        expected: 1 / (2 * q * q),
        tolerance: { rel: 0.01 },
      });
    }
    expect.hasAssertions();
  });
});

describe('solved circuits', () => {
  const readings = {
    resonant_frequency_zero_phase_Hz: (s: Solved) => s.frequency,
    impedance_at_resonance_ohm: (s: Solved) => s.state.inverterVoltage / s.state.inverterCurrent,
    tank_terminal_voltage_V_rms: (s: Solved) => s.state.inverterVoltage,
    input_current_A_rms: (s: Solved) => s.state.inverterCurrent,
    coil_current_A_rms: (s: Solved) => s.state.coilCurrent,
    coil_voltage_excluding_leads_V_rms: (s: Solved) => s.state.coilVoltage,
    capacitor_current_total_A_rms: (s: Solved) => s.state.bankCurrent,
    capacitor_bank_reactive_power_var: (s: Solved) => s.state.reactivePower,
    power_in_coil_W: (s: Solved) => s.state.loss.coil,
    power_in_leads_W: (s: Solved) => s.state.loss.bus,
    power_in_capacitors_W: (s: Solved) => s.state.loss.bank,
  };
  interface Solved {
    frequency: number;
    state: ReturnType<typeof circuitState>;
  }

  it('agree in frequency, voltages, currents and losses (family H, ngspice 39)', () => {
    const cases = solvedCases.filter((one) => one.family === 'H');
    expect(cases.length).toBeGreaterThanOrEqual(2);
    for (const one of cases) {
      const n = input(one, 'capacitors_in_parallel');
      const each = input(one, 'capacitance_each_F');
      const circuit = {
        ...plain,
        capacitance: groupCapacitance(each, n, 1),
        fixedInductance: input(one, 'lead_inductance_H'),
        fixedResistance: input(one, 'lead_resistance_ohm'),
      };
      const coil = {
        inductance: input(one, 'coil_inductance_loaded_H'),
        resistance: input(one, 'coil_resistance_loaded_ohm'),
      };
      // The case gives a fixed series resistance of each unit, not a loss tangent: iterate to the same resistance.
      let frequency = 3e4;
      for (let k = 0; k < 60; k++) {
        circuit.lossTangent = input(one, 'esr_each_ohm') * 2 * Math.PI * frequency * each;
        frequency = resonance(circuit, () => coil, frequency).frequency;
      }
      const solved = {
        frequency,
        state: circuitState(circuit, coil, frequency, input(one, 'input_power_W')),
      };
      for (const [key, reading] of Object.entries(readings)) {
        const expected = one.expected[key];
        if (typeof expected !== 'number') continue;
        check(subject, {
          id: `${one.id}-${key}`,
          quantity: key,
          source: `${one.method}, ${one.tool}`,
          standing: solvedElsewhere,
          value: reading(solved),
          expected,
          tolerance: { rel: 1e-6 },
        });
      }
    }
  });
});

type C = [number, number];
const mul = (a: C, b: C): C => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
const sub = (a: C, b: C): C => [a[0] - b[0], a[1] - b[1]];
const inv = (a: C): C => {
  const d = a[0] ** 2 + a[1] ** 2;
  return [a[0] / d, -a[1] / d];
};

/** Nodal analysis: admittances between nodes (0 = ground), one ampere into node 1; Gauss with pivoting. */
function nodeVoltages(count: number, branches: readonly [number, number, C][]): C[] {
  const a: C[][] = Array.from({ length: count }, () => Array.from({ length: count + 1 }, (): C => [0, 0]));
  const addTo = (i: number, j: number, y: C, sign: number) => {
    const cell = a[i - 1]?.[j - 1];
    if (cell) {
      cell[0] += sign * y[0];
      cell[1] += sign * y[1];
    }
  };
  for (const [p, q, z] of branches) {
    const y = inv(z);
    addTo(p, p, y, 1);
    addTo(q, q, y, 1);
    addTo(p, q, y, -1);
    addTo(q, p, y, -1);
  }
  a[0]![count] = [1, 0];
  for (let k = 0; k < count; k++) {
    const pivot = a
      .slice(k)
      .reduce((best, row, i) => (Math.hypot(...row[k]!) > Math.hypot(...a[best]![k]!) ? k + i : best), k);
    [a[k], a[pivot]] = [a[pivot]!, a[k]!];
    for (let i = 0; i < count; i++) {
      if (i === k) continue;
      const factor = mul(a[i]![k]!, inv(a[k]![k]!));
      for (let j = k; j <= count; j++) a[i]![j] = sub(a[i]![j]!, mul(factor, a[k]![j]!));
    }
  }
  return a.map((row, k) => mul(row[count]!, inv(row[k]!)));
}

describe('nodal analysis', () => {
  it.each(['primary', 'secondary'] as const)(
    'agrees with the circuit with choke, transformer and bank on the %s side',
    (bankSide) => {
      const n = 6;
      const f = 21e3;
      const w = 2 * Math.PI * f;
      const coil = { inductance: 0.55e-6, resistance: 0.03 };
      const circuit: TankCircuit = {
        connection: 'parallel',
        choke: 4e-6,
        ratio: n,
        transformer: { leakage: 1.2e-6, magnetising: 3e-4, resistance: 4e-3 },
        bankSide,
        capacitance: bankSide === 'primary' ? 2.2e-6 : 2.2e-6 * n * n,
        lossTangent: 7e-4,
        fixedInductance: 6e-8,
        fixedResistance: 5e-4,
      };
      const xc = 1 / (w * circuit.capacitance);
      // All referred to the primary: an ideal transformer multiplies secondary impedances by n².
      const bank: C = bankSide === 'primary' ? [7e-4 * xc, -xc] : [7e-4 * xc * n * n, -xc * n * n];
      const choke: [number, number, C] = [1, 2, [0, w * 4e-6]];
      const magnetising: [number, number, C] = [2, 0, [0, w * 3e-4]];
      const winding: [number, number, C] = [2, 3, [4e-3, w * 1.2e-6]];
      const bus: [number, number, C] = [3, 4, [5e-4 * n * n, w * 6e-8 * n * n]];
      const work: [number, number, C] = [4, 0, [0.03 * n * n, w * 0.55e-6 * n * n]];
      const v = nodeVoltages(4, [
        choke,
        magnetising,
        winding,
        bus,
        work,
        [bankSide === 'primary' ? 2 : 3, 0, bank],
      ]);
      const z = inputImpedance(circuit, coil, f);
      const state = circuitState(circuit, coil, f, z.re);
      const report = (id: string, value: number, expected: number) =>
        check(subject, {
          id: `nodal-${bankSide}-${id}`,
          quantity: id,
          source: 'nodal analysis in this test',
          standing: solvedElsewhere,
          value,
          expected,
          tolerance: { rel: 1e-9 },
        });
      report('input resistance', z.re, v[0]![0]);
      report('input reactance', z.im, v[0]![1]);
      const coilVoltage = Math.hypot(...v[3]!);
      report('coil voltage', state.coilVoltage, coilVoltage / n);
      report('coil current', state.coilCurrent, (coilVoltage / Math.hypot(...work[2])) * n);
      const bankVoltage = Math.hypot(...v[bankSide === 'primary' ? 1 : 2]!);
      report('bank voltage', state.bankVoltage, bankSide === 'primary' ? bankVoltage : bankVoltage / n);
      expect(state.inverterCurrent).toBeCloseTo(1, 9);
    },
  );
});

describe('push-pull stage', () => {
  it('has π·Vdc peak and π/√2·Vdc rms over the tank', () => {
    for (const v of valuesOf('pushpull_vpk')) compare(v, pushPullPeakVoltage(1));
    for (const v of valuesOf('pushpull_vrms')) compare(v, pushPullTankVoltage(1));
    expect(valuesOf('pushpull_')).toHaveLength(2);
  });

  it('raises the frequency by √2 when half of the parallel capacitors are taken out (common practice)', () => {
    const coil = () => ({ inductance: 1.5e-6, resistance: 1e-6 });
    const full = resonance({ ...plain, capacitance: groupCapacitance(0.33e-6, 6, 1) }, coil, 5e4).frequency;
    const half = resonance({ ...plain, capacitance: groupCapacitance(0.33e-6, 3, 1) }, coil, 5e4).frequency;
    check(subject, {
      id: 'half-capacitors',
      quantity: 'frequency ratio',
      source: 'f ∝ 1/√C',
      standing: evaluated,
      value: half / full,
      expected: Math.SQRT2,
      tolerance: { rel: 1e-6 },
    });
    expect(half).toBeGreaterThan(full);
  });
});
