/** Stated defaults for what is not known of the machine, each with a wide band and a way to find out. */
import type { Connection, TankCircuit } from '../tank/circuit.ts';
import type { SupplyLimits } from '../tank/deliverable.ts';
import { pushPullTankVoltage } from '../tank/push-pull.ts';
import { bankAnswers } from './assume-bank.ts';
import type { Machine, Quantity, Severity, TankKind } from './types.ts';

/** One answer that was missing. */
export interface Assumption {
  field: string;
  name: string;
  /** What was taken instead; null: see `taken`, or the matter is left out of the check. */
  value: Quantity | null;
  /** What was taken, in words, where it is no quantity. */
  taken?: string;
  /** Half width of its band as a fraction of the value. */
  band: number;
  severity: Exclude<Severity, 'blocker'>;
  howToFind: string;
}

/** A tolerance of the machine and what it does to the circuit. */
export interface CircuitSource {
  name: string;
  variation: Quantity;
  apply(circuit: TankCircuit, sign: number): TankCircuit;
}

export interface AssumedMachine {
  kind: TankKind;
  connection: Connection;
  limits: SupplyLimits;
  frequencyMin: number | null;
  frequencyMax: number | null;
  /** Circuit without bank: capacitance, loss tangent and ratio are set per row. */
  circuit: Omit<TankCircuit, 'capacitance' | 'lossTangent' | 'ratio'>;
  ratios: number[];
  fittedTap: number | null;
  stray: number;
  sources: CircuitSource[];
  /** Half band of the deliverable power, as a fraction, where tank kind or rated power is assumed. */
  powerBand: number;
  assumptions: Assumption[];
}

/** Defaults from common practice; each is shown with its band. */
export const defaults = {
  ratedPower: 25e3,
  fixedInductance: 60e-9,
  fixedInductanceBand: 0.6,
  knownInductanceBand: 0.1,
  fixedResistance: 0.3e-3,
  leakageShare: 0.05,
  magnetisingTimes: 50,
  windingShare: 0.03,
};

/**
 * @param coil the coil's inductance and resistance at its terminals, for defaults that are shares of it
 */
export function assumeMachine(
  machine: Machine,
  coil: { inductance: number; resistance: number },
): AssumedMachine {
  const assumptions: Assumption[] = [];
  const sources: CircuitSource[] = [];
  const assume = (a: Omit<Assumption, 'severity'> & { severity?: Assumption['severity'] }) =>
    assumptions.push({ severity: 'note', ...a });
  const kind = machine.tank;
  if (kind === 'not-known') {
    assume({
      field: 'machine.tank',
      name: 'tank circuit',
      value: null,
      band: 0.5,
      severity: 'caution',
      taken: 'a parallel tank (the power’s band is widened)',
      howToFind: 'Read it in the supply’s circuit diagram or manual.',
    });
  }
  const limits = supplyLimits(machine, assume);
  const fixed = fixedCircuit(machine, assume, sources);
  const transformer = transformerOf(machine, coil, assume, sources);
  bankAnswers(machine, assume);
  const { frequencyMin, frequencyMax } = machine.supply;
  if (frequencyMin === null || frequencyMax === null) {
    assume({
      field: frequencyMin === null ? 'machine.supply.frequencyMin' : 'machine.supply.frequencyMax',
      name: 'frequency range of the supply',
      value: null,
      band: 0,
      severity: 'caution',
      howToFind:
        'Read it from the plate or the manual; the frequency is not checked against that end meanwhile.',
    });
  }
  const choke = kind === 'choke-parallel' ? (machine.supply.chokeInductance ?? 0) : 0;
  if (kind === 'choke-parallel' && choke === 0) {
    assume({
      field: 'machine.supply.chokeInductance',
      name: 'series choke',
      value: { value: 0, unit: 'H' },
      band: 0,
      severity: 'caution',
      howToFind: 'Measure the choke between inverter and tank; the tank’s own resonance is taken meanwhile.',
    });
  }
  return {
    kind,
    connection: kind === 'series' ? 'series' : 'parallel',
    limits,
    frequencyMin,
    frequencyMax,
    circuit: {
      connection: kind === 'series' ? 'series' : 'parallel',
      choke,
      transformer,
      bankSide: machine.transformer?.bankSide ?? 'primary',
      ...fixed,
    },
    ratios: machine.transformer?.ratios ?? [1],
    fittedTap: machine.transformer ? machine.transformer.fittedTap : null,
    stray: machine.fixed.strayCapacitance ?? 0,
    sources,
    powerBand: Math.hypot(
      0,
      ...assumptions
        .filter((a) => a.field === 'machine.tank' || a.field === 'machine.supply.ratedPower')
        .map((a) => a.band),
    ),
    assumptions,
  };
}

/** Records one assumption. */
export type Assume = (a: Omit<Assumption, 'severity'> & { severity?: Assumption['severity'] }) => void;

function supplyLimits(machine: Machine, assume: Assume): SupplyLimits {
  const s = machine.supply;
  const pushPull = machine.tank === 'push-pull';
  // A self-resonant stage sets the tank voltage by its DC supply: that is its voltage limit.
  const voltage =
    pushPull && s.dcVoltage !== null ? pushPullTankVoltage(s.dcVoltage) : (s.voltageLimit ?? Infinity);
  const current = s.currentLimit ?? Infinity;
  if (pushPull && s.dcVoltage === null) {
    assume({
      field: 'machine.supply.dcVoltage',
      name: 'DC voltage of the push-pull stage',
      value: null,
      band: 0,
      severity: 'caution',
      howToFind: 'Measure the DC supply under load; it sets the tank voltage and so the power.',
    });
  } else if (!pushPull && s.voltageLimit === null) {
    assume({
      field: 'machine.supply.voltageLimit',
      name: 'voltage limit at the inverter output',
      value: null,
      band: 0,
      severity: 'caution',
      howToFind: 'Ask the supply’s maker; deliverable power is not limited by voltage meanwhile.',
    });
  }
  if (!pushPull && s.currentLimit === null) {
    assume({
      field: 'machine.supply.currentLimit',
      name: 'current limit at the inverter output',
      value: null,
      band: 0,
      severity: 'caution',
      howToFind: 'Ask the supply’s maker; deliverable power is not limited by current meanwhile.',
    });
  }
  if (s.ratedPower !== null) return { ratedPower: s.ratedPower, voltage, current };
  const unlimited = !Number.isFinite(voltage) && !Number.isFinite(current);
  assume({
    field: 'machine.supply.ratedPower',
    name: 'rated power',
    value: unlimited ? { value: defaults.ratedPower, unit: 'W' } : null,
    band: unlimited ? 0.6 : 0,
    severity: 'caution',
    howToFind: 'Read it from the supply’s plate.',
  });
  return { ratedPower: unlimited ? defaults.ratedPower : Infinity, voltage, current };
}

function fixedCircuit(machine: Machine, assume: Assume, sources: CircuitSource[]) {
  const f = machine.fixed;
  const fixedInductance = f.inductance ?? defaults.fixedInductance;
  const band =
    f.inductance === null ? defaults.fixedInductanceBand : (f.inductanceBand ?? defaults.knownInductanceBand);
  if (f.inductance === null) {
    assume({
      field: 'machine.fixed.inductance',
      name: 'fixed inductance of bus and head',
      value: { value: fixedInductance, unit: 'H' },
      band,
      severity: 'caution',
      howToFind: 'Calibrate the machine: a known coil with its frequency at two bank settings gives it.',
    });
  }
  sources.push({
    name: 'fixed inductance of bus and head',
    variation: { value: fixedInductance * band, unit: 'H' },
    apply: (c, sign) => ({ ...c, fixedInductance: c.fixedInductance + sign * fixedInductance * band }),
  });
  if (f.strayCapacitance === null) {
    assume({
      field: 'machine.fixed.strayCapacitance',
      name: 'stray capacitance across the tank',
      value: null,
      taken: 'none',
      band: 0,
      howToFind: 'Calibrate the machine; it matters with small banks only.',
    });
  }
  const fixedResistance = f.resistance ?? defaults.fixedResistance;
  const share = f.resistance === null ? 0.8 : 0.2;
  if (f.resistance === null) {
    assume({
      field: 'machine.fixed.resistance',
      name: 'resistance of bus and head',
      value: { value: fixedResistance, unit: 'ohm' },
      band: share,
      howToFind: 'Measure with a shorting strap in place of the coil.',
    });
  }
  sources.push({
    name: 'resistance of bus and head',
    variation: { value: fixedResistance * share, unit: 'ohm' },
    apply: (c, sign) => ({ ...c, fixedResistance: c.fixedResistance + sign * fixedResistance * share }),
  });
  return { fixedInductance, fixedResistance };
}

function transformerOf(
  machine: Machine,
  coil: { inductance: number; resistance: number },
  assume: Assume,
  sources: CircuitSource[],
): TankCircuit['transformer'] {
  const t = machine.transformer;
  if (!t) return null;
  const ratio = t.ratios[t.fittedTap] ?? t.ratios[0] ?? 1;
  const seen = ratio ** 2 * coil.inductance;
  const value = {
    leakage: t.leakageInductance ?? defaults.leakageShare * seen,
    magnetising: t.magnetisingInductance ?? defaults.magnetisingTimes * seen,
    resistance: t.windingResistance ?? defaults.windingShare * ratio ** 2 * coil.resistance,
  };
  const parts = [
    [
      'leakageInductance',
      'leakage',
      'leakage inductance of the transformer',
      'H',
      1,
      0.1,
      'Measure at the primary with the secondary shorted.',
    ],
    [
      'magnetisingInductance',
      'magnetising',
      'magnetising inductance of the transformer',
      'H',
      0.7,
      0.2,
      'Measure at the primary with the secondary open.',
    ],
    [
      'windingResistance',
      'resistance',
      'winding resistance of the transformer',
      'ohm',
      1,
      0.2,
      'Ask the maker for the loss at rated current.',
    ],
  ] as const;
  for (const [field, key, name, unit, wide, narrow, howToFind] of parts) {
    const missing = t[field] === null;
    const band = missing ? wide : narrow;
    const half = value[key] * band;
    if (missing)
      assume({
        field: `machine.transformer.${field}`,
        name,
        value: { value: value[key], unit },
        band,
        howToFind,
      });
    sources.push({
      name,
      variation: { value: half, unit },
      apply: (c, sign) =>
        c.transformer
          ? { ...c, transformer: { ...c.transformer, [key]: Math.max(0, c.transformer[key] + sign * half) } }
          : c,
    });
  }
  return value;
}
