import { describe, expect, it } from 'vitest';
import { chokeLoad, pushPullPeakVoltage, pushPullPower, pushPullTankVoltage } from './push-pull.ts';
import { arrangements, groupCapacitance, unitStress } from './bank.ts';
import { calibrate } from './calibrate.ts';
import { circuitState, inputImpedance, tankBranch, type TankCircuit } from './circuit.ts';
import { deliverablePower } from './deliverable.ts';
import { losslessFrequency, resonance } from './resonance.ts';
import { exampleMachine } from '../check/examples.ts';

const plain = (change: Partial<TankCircuit> = {}): TankCircuit => ({
  connection: 'parallel',
  choke: 0,
  ratio: 1,
  transformer: null,
  bankSide: 'primary',
  capacitance: 1e-6,
  lossTangent: 0,
  fixedInductance: 0,
  fixedResistance: 0,
  ...change,
});
const coil = { inductance: 1.5e-6, resistance: 0.06 };

describe('tank circuit', () => {
  it('finds the unity-power-factor frequency of a parallel tank', () => {
    const { frequency, zeroPhase } = resonance(plain(), () => coil, 1e5);
    expect(zeroPhase).toBe(true);
    expect(frequency / 129793).toBeCloseTo(1, 5);
  });

  it('finds the lossless frequency of a series tank and a real impedance there', () => {
    const circuit = plain({ connection: 'series' });
    const { frequency, lossless } = resonance(circuit, () => coil, 1e5);
    expect(frequency / lossless).toBeCloseTo(1, 9);
    expect(inputImpedance(circuit, coil, frequency).re).toBeCloseTo(0.06, 9);
  });

  it('says so when the loss leaves no zero-phase frequency', () => {
    const found = resonance(plain(), () => ({ inductance: 1e-6, resistance: 1.5 }), 1e5);
    expect(found.zeroPhase).toBe(false);
    expect(found.frequency).toBe(found.lossless);
  });

  it.each([
    ['parallel', 'primary'],
    ['series', 'primary'],
    ['parallel', 'secondary'],
    ['series', 'secondary'],
  ] as const)(
    'loses exactly what leaves the inverter (%s tank, bank on the %s side)',
    (connection, bankSide) => {
      const circuit = plain({
        connection,
        bankSide,
        ratio: 8,
        transformer: { leakage: 3e-6, magnetising: 2e-3, resistance: 0.01 },
        lossTangent: 8e-4,
        fixedInductance: 5e-8,
        fixedResistance: 5e-4,
        capacitance: bankSide === 'primary' ? 1e-6 : 4e-5,
      });
      const found = resonance(circuit, () => coil, 2e4);
      const state = circuitState(circuit, coil, found.frequency, 20e3);
      const total = Object.values(state.loss).reduce((sum, loss) => sum + loss, 0);
      expect(total / 20e3).toBeCloseTo(1, 9);
      const { reactivePower, bankVoltage, bankCurrent } = state;
      expect(reactivePower / (bankVoltage * bankCurrent)).toBeCloseTo(1, 5);
    },
  );

  it('refers coil and bus to the primary with n², adds leakage and sets magnetising in parallel', () => {
    const circuit = plain({
      ratio: 10,
      transformer: { leakage: 5e-6, magnetising: Infinity, resistance: 0 },
      fixedInductance: 1e-7,
    });
    expect(tankBranch(circuit, { inductance: 1e-6, resistance: 0 }, 2e4).inductance).toBeCloseTo(115e-6, 15);
    const shunted = { ...circuit, transformer: { leakage: 5e-6, magnetising: 1e-3, resistance: 0 } };
    expect(tankBranch(shunted, { inductance: 1e-6, resistance: 0 }, 2e4).inductance).toBeCloseTo(
      (115e-6 * 1e-3) / (115e-6 + 1e-3),
      15,
    );
  });

  it('gives the same frequency with the bank on either side when the transformer is ideal', () => {
    const ideal = { leakage: 0, magnetising: Infinity, resistance: 0 };
    const primary = plain({ ratio: 7, transformer: ideal, capacitance: 2e-6 });
    const secondary = plain({ ratio: 7, transformer: ideal, bankSide: 'secondary', capacitance: 2e-6 * 49 });
    expect(
      resonance(secondary, () => coil, 2e4).frequency / resonance(primary, () => coil, 2e4).frequency,
    ).toBeCloseTo(1, 9);
    const a = circuitState(primary, coil, 1e4, 1e3);
    const b = circuitState(secondary, coil, 1e4, 1e3);
    expect(a.coilCurrent / b.coilCurrent).toBeCloseTo(1, 9);
    expect(a.inverterVoltage / b.inverterVoltage).toBeCloseTo(1, 9);
  });

  it('works above the tank resonance behind a choke, where the tank cancels it', () => {
    const circuit = plain({ choke: 6e-6 });
    const found = resonance(circuit, () => coil, 1e5);
    // Lossless: the choke and the coil act in parallel against the bank.
    const parallelInductance = (6e-6 * 1.5e-6) / 7.5e-6;
    expect(found.zeroPhase).toBe(true);
    expect(found.frequency / losslessFrequency(parallelInductance, 1e-6)).toBeCloseTo(1, 2);
  });
});

describe('deliverable power', () => {
  const circuit = plain({ connection: 'series' });
  const f = losslessFrequency(1.5e-6, 1e-6);
  it.each([
    [{ ratedPower: 100, voltage: 100, current: 100 }, 100, 'rated-power'],
    [{ ratedPower: 1e6, voltage: 3, current: 1e4 }, 150, 'voltage'],
    [{ ratedPower: 1e6, voltage: 1e4, current: 50 }, 150, 'current'],
  ] as const)('is the least of what %o allows', (limits, power, by) => {
    const found = deliverablePower(circuit, coil, f, limits);
    expect(found.power).toBeCloseTo(power, 6);
    expect(found.limitedBy).toBe(by);
  });
});

describe('bank', () => {
  it('lists every setting of whole strings and marks the fitted one', () => {
    const rows = arrangements(exampleMachine().bank);
    expect(rows.map((row) => row.unitsPerGroup[0])).toEqual([1, 2, 3, 4, 5, 6, 7, 8]);
    expect(rows.filter((row) => row.fitted).map((row) => row.id)).toEqual(['units-5']);
    expect(groupCapacitance(2e-6, 6, 2)).toBe(3e-6);
  });

  it('shares current by capacitance and voltage by units in series', () => {
    const base = exampleMachine().bank;
    if (base.kind !== 'groups' || !base.groups[0]) throw new Error('example has groups');
    const group = base.groups[0];
    const rows = arrangements({
      kind: 'groups',
      groups: [
        { ...group, unitCapacitance: 1e-6, fitted: 4, unitsInSeries: 2 },
        { ...group, unitCapacitance: 1e-6, fitted: 2, unitsInSeries: 1 },
      ],
    });
    const fitted = rows.find((row) => row.fitted);
    expect(fitted?.capacitance).toBeCloseTo(3e-6, 12);
    const stress = unitStress(fitted ?? rows[0]!, 600, 300);
    expect(stress.map((s) => [Math.round(s.voltage), Math.round(s.current)])).toEqual([
      [300, 50],
      [600, 100],
    ]);
  });

  it('keeps a large bank readable without losing the fitted setting', () => {
    const base = exampleMachine().bank;
    if (base.kind !== 'groups' || !base.groups[0]) throw new Error('example has groups');
    const group = { ...base.groups[0], count: 30, positions: 30 };
    const rows = arrangements({
      kind: 'groups',
      groups: [
        { ...group, fitted: 17 },
        { ...group, unitCapacitance: 0.047e-6, fitted: 3 },
        { ...group, unitCapacitance: 0.011e-6, fitted: 2 },
      ],
    });
    expect(rows.length).toBeLessThanOrEqual(50);
    expect(rows.some((row) => row.fitted)).toBe(true);
  });
});

describe('push-pull stage', () => {
  it('has π·Vdc peak and π/√2·Vdc rms, and √2 of the voltage for twice the power', () => {
    expect(pushPullPeakVoltage(100)).toBeCloseTo(314.159, 3);
    expect(pushPullTankVoltage(100)).toBeCloseTo(222.144, 3);
    expect(pushPullPower(100 * Math.SQRT2, 5) / pushPullPower(100, 5)).toBeCloseTo(2, 12);
  });

  it('ripples in the choke by the volt-seconds of the rectified tap voltage', () => {
    const load = chokeLoad(1200, 48, 50e3, 100e-6);
    // Independent: integrate the voltage over the choke numerically over one half period.
    let flux = 0;
    let low = 0;
    let high = 0;
    const n = 200_000;
    for (let i = 0; i < n; i++) {
      const theta = (Math.PI * (i + 0.5)) / n;
      flux += (48 * (1 - (Math.PI / 2) * Math.sin(theta)) * Math.PI) / n / (2 * Math.PI * 50e3);
      low = Math.min(low, flux);
      high = Math.max(high, flux);
    }
    expect(load.mean).toBeCloseTo(25, 9);
    expect(load.ripplePeakToPeak).toBeCloseTo((high - low) / 100e-6, 3);
    expect(load.peak).toBeCloseTo(load.mean + load.ripplePeakToPeak / 2, 12);
  });
});

describe('calibration', () => {
  const settings = [1e-6, 2e-6, 4e-6];
  const seen = (tank: number, stray: number) =>
    settings.map((capacitance) => ({ capacitance, frequency: losslessFrequency(tank, capacitance + stray) }));
  const input = {
    coilInductance: 0.8e-6,
    coilBand: 0.01,
    capacitanceBand: 0.02,
    frequencyBand: 0.001,
    ratio: 1,
    leakage: 0,
    q: null,
  };

  it('finds fixed inductance and stray capacitance, each with a band', () => {
    const result = calibrate({ ...input, points: seen(0.9e-6, 2e-8) });
    expect(result.ok).toBe(true);
    if (!result.ok) return;
    expect(result.calibrated.fixedInductance).toBeCloseTo(0.1e-6, 12);
    expect(result.calibrated.strayCapacitance).toBeCloseTo(2e-8, 12);
    expect(result.calibrated.fixedInductanceBand).toBeGreaterThan(0.8e-8);
    expect(result.calibrated.residual).toBeLessThan(1e-9);
  });

  it('takes leakage and ratio off on the primary side', () => {
    const tank = 64 * (0.8e-6 + 0.05e-6) + 4e-6;
    const result = calibrate({ ...input, ratio: 8, leakage: 4e-6, points: seen(tank, 0) });
    expect(result.ok && result.calibrated.fixedInductance).toBeCloseTo(0.05e-6, 12);
  });

  it('refuses settings that cannot tell the two apart', () => {
    const points = [
      { capacitance: 1e-6, frequency: 1e5 },
      { capacitance: 1.01e-6, frequency: 0.99e5 },
    ];
    expect(calibrate({ ...input, points })).toMatchObject({ ok: false });
    expect(calibrate({ ...input, points: [] })).toMatchObject({ ok: false });
    const rising = [
      { capacitance: 1e-6, frequency: 1e5 },
      { capacitance: 2e-6, frequency: 2e5 },
    ];
    expect(calibrate({ ...input, points: rising })).toMatchObject({ ok: false });
  });
});
