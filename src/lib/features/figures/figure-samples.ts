/** Invented figures for tests and the gallery of components; not computed by the check. */
import type { ChainStep, Figure, LadderRow, LadderState, Unit } from '../../induction/check/types.ts';

export function sampleFigure(value: number, unit: Unit, band = 0.03): Figure {
  return {
    value,
    low: value * (1 - band),
    high: value * (1 + band),
    unit,
    method: 'sample',
    assumptions: [],
    contributors: [],
  };
}

function sampleState(frequency: number, power: number, inBand: boolean): LadderState {
  return {
    frequency: sampleFigure(frequency, 'Hz'),
    deliverablePower: sampleFigure(power, 'W', 0.08),
    limitedBy: 'current',
    powerIntoPart: power * 0.76,
    coilCurrent: 450,
    coilVoltage: 420,
    bankCurrent: 455,
    bankVoltage: 430,
    reactivePower: 190_000,
    unitVoltage: 430,
    unitCurrent: 91,
    unitReactivePower: 38_000,
    inverterVoltage: 300,
    inverterCurrent: 52,
    inBand,
    limits: [],
  };
}

export const sampleLadder: LadderRow[] = [3, 4, 5, 6, 7, 8].map((units) => {
  const cold = 92_000 * Math.sqrt(4 / units) * 1.02;
  const hot = 98_000 * Math.sqrt(4 / units);
  const ok = (frequency: number) => frequency >= 60_000 && frequency <= 100_000;
  const power = 15_000 * Math.min(1, 1.15 - Math.abs(units - 5.5) * 0.12);
  return {
    id: `row-${units}`,
    label: `${units} units`,
    capacitance: units * 0.33e-6,
    unitsPerGroup: [units],
    tap: null,
    ratio: 1,
    fitted: units === 4,
    advised: units === 6,
    reason: units === 6 ? 'most deliverable power inside the band' : '',
    cold: sampleState(cold, power * 0.93, ok(cold)),
    hot: sampleState(hot, power, ok(hot)),
    fits: units >= 5 && units <= 7,
  };
});

export const sampleChain: ChainStep[] = [
  { name: 'inverter', power: sampleFigure(15_000, 'W'), share: 1 },
  { name: 'transformer', power: sampleFigure(450, 'W', 0.3), share: 0.03 },
  { name: 'bank', power: sampleFigure(150, 'W', 0.3), share: 0.01 },
  { name: 'bus', power: sampleFigure(300, 'W', 0.2), share: 0.02 },
  { name: 'leads', power: sampleFigure(300, 'W', 0.2), share: 0.02 },
  { name: 'coil', power: sampleFigure(2_400, 'W', 0.1), share: 0.16 },
  { name: 'part', power: sampleFigure(11_400, 'W', 0.05), share: 0.76 },
];

const seconds = Array.from({ length: 81 }, (_, i) => i / 10);
export const sampleTemperatures = {
  time: seconds,
  surface: seconds.map((t) => 20 + 940 * (1 - Math.exp(-t / 2.6))),
  mean: seconds.map((t) => 20 + 900 * (1 - Math.exp(-t / 4.2))),
  core: seconds.map((t) => 20 + 860 * (1 - Math.exp(-t / 4.2)) * (1 - Math.exp(-t / 1.2))),
};
