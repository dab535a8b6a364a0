import { describe, expect, it } from 'vitest';
import { materialOf } from '../../materials/material-of.ts';
import { assumedValues } from './assumptions.ts';
import { baseContext, changed, examined, fittedIndex, type RuleCase } from './case-context.ts';
import {
  capacitorLimits,
  coilCurrent,
  coilVoltage,
  tapUnbalanced,
  transformerLimit,
} from './electrical-limits.ts';
import { curieCrossing, frequencyForDepth, nearMelting, partTooThin, surfaceOverheats } from './depth.ts';
import { frequencyBand, noRowFits } from './frequency.ts';
import { loadMismatch, lowEfficiency, powerShort, qOutOfRange, timeShort } from './power.ts';
import { chokeSaturates, deviceVoltage, pushPullOverload, startUp } from './push-pull.ts';

const row = (path: string) => `ladder.${fittedIndex()}.${path}`;
const base = baseContext;
const at = (values: Record<string, unknown>) => () => changed(base(), values);
const hz = () => ({
  cold: base().ladder[fittedIndex()]!.cold.frequency,
  hot: base().ladder[fittedIndex()]!.hot.frequency,
});
const pushPull = (supply: Record<string, unknown>) =>
  at(
    Object.fromEntries([
      ['requirement.machine.tank', 'push-pull'],
      ...Object.entries(supply).map(([key, value]) => [`requirement.machine.supply.${key}`, value]),
    ]),
  );
const c45 = () => materialOf({ kind: 'library', id: 'steel-c45' });
const curie = (target: number) =>
  at({ 'geometry.material': c45(), 'requirement.process.targetTemperatureC': target });
/** The fitted row with every part power and deliverable power scaled. */
const weak = (share: number) => {
  const fitted = base().ladder[fittedIndex()]!;
  const state = (name: 'cold' | 'hot') => ({
    ...fitted[name],
    powerIntoPart: fitted[name].powerIntoPart * share,
    limitedBy: 'voltage' as const,
    deliverablePower: {
      ...fitted[name].deliverablePower,
      value: fitted[name].deliverablePower.value * share,
    },
  });
  return at({ [row('cold')]: state('cold'), [row('hot')]: state('hot') });
};
const solved = () => base().fittedRow!.setting.arrangement.parts[0]!;
const limit = (field: string, value: number | null) =>
  at({ [`fittedRow.setting.arrangement.parts.0.${field}`]: value });
const stress = (kind: 'bankVoltage' | 'bankCurrent') =>
  Math.max(base().fittedRow!.points.cold.state[kind], base().fittedRow!.points.hot.state[kind]);
const needed = () => base().heating!.meanPowerNeeded!;

const cases: RuleCase[] = [
  {
    code: 'assumed-value',
    rule: assumedValues,
    raises: () => examined((r) => (r.machine.fixed.inductance = null)),
    not: () => base(),
  },
  {
    code: 'frequency-below-band',
    rule: frequencyBand,
    raises: () =>
      at({
        'requirement.machine.supply.frequencyMin': hz().cold.value * 1.3,
        'requirement.machine.supply.frequencyMax': 1e6,
      })(),
    not: () => at({ 'requirement.machine.supply.frequencyMin': hz().cold.value / 1.3 })(),
    severity: 'blocker',
  },
  {
    code: 'frequency-above-band',
    rule: frequencyBand,
    raises: () =>
      at({
        'requirement.machine.supply.frequencyMax': hz().cold.value / 1.3,
        'requirement.machine.supply.frequencyMin': 1,
      })(),
    not: () => at({ 'requirement.machine.supply.frequencyMax': hz().cold.value * 1.3 })(),
    severity: 'blocker',
  },
  {
    code: 'no-row-fits',
    rule: noRowFits,
    raises: () =>
      changed(base(), {
        ladder: base().ladder.map((one) => ({ ...one, fits: false, cold: { ...one.cold, inBand: false } })),
      }),
    not: () => base(),
    severity: 'blocker',
  },
  { code: 'load-mismatch', rule: loadMismatch, raises: weak(0.3), not: weak(1), severity: 'caution' },
  { code: 'power-short', rule: powerShort, raises: weak(0.3), not: weak(1), severity: 'caution' },
  { code: 'power-short', rule: powerShort, raises: weak(0.001), not: weak(1), severity: 'blocker' },
  {
    code: 'time-short',
    rule: timeShort,
    raises: () => at({ 'requirement.process.time': base().heating!.timeAtDeliverablePower!.value * 1.01 })(),
    not: () => at({ 'requirement.process.time': base().heating!.timeAtDeliverablePower!.high * 1.01 })(),
    severity: 'note',
  },
  {
    code: 'capacitor-voltage',
    rule: capacitorLimits,
    raises: () => limit('voltageLimit', stress('bankVoltage') * 0.9)(),
    not: () => limit('voltageLimit', stress('bankVoltage') * 1.1)(),
  },
  {
    code: 'capacitor-current',
    rule: capacitorLimits,
    raises: () => limit('currentLimit', (stress('bankCurrent') / solved().strings) * 0.2)(),
    not: () => limit('currentLimit', (stress('bankCurrent') / solved().strings) * 1.1)(),
    severity: 'blocker',
  },
  {
    code: 'capacitor-kvar',
    rule: capacitorLimits,
    raises: () => limit('reactivePowerLimit', 100)(),
    not: () => limit('reactivePowerLimit', null)(),
    severity: 'blocker',
  },
  {
    code: 'transformer-limit',
    rule: transformerLimit,
    raises: () => examined((r) => r.machine.transformer && (r.machine.transformer.apparentPowerLimit = 1e4)),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'coil-voltage',
    rule: coilVoltage,
    raises: () => at({ [row('hot.coilVoltage')]: 1200 })(),
    not: () => at({ [row('hot.coilVoltage')]: 900 })(),
  },
  {
    code: 'coil-current',
    rule: coilCurrent,
    raises: at({ 'water.wallTemperature.value': 120 }),
    not: at({ 'water.wallTemperature.value': 95 }),
  },
  {
    code: 'tap-unbalanced',
    rule: tapUnbalanced,
    raises: at({ 'requirement.coil.centreTap': true, 'resolved.turns': 5 }),
    not: at({ 'requirement.coil.centreTap': true, 'resolved.turns': 6 }),
  },
  {
    code: 'part-too-thin-for-frequency',
    rule: partTooThin,
    raises: at({ 'skin.diameterOverDepthHot': 2.5 }),
    not: at({ 'skin.diameterOverDepthHot': 3.5 }),
  },
  {
    code: 'frequency-too-high-for-depth',
    rule: frequencyForDepth,
    raises: at({ 'requirement.part.depthWanted': 5e-3, 'tank.operatingFrequency.value': 2e4 }),
    not: at({ 'requirement.part.depthWanted': 2e-3, 'tank.operatingFrequency.value': 2e4 }),
  },
  {
    code: 'frequency-too-low-for-depth',
    rule: frequencyForDepth,
    raises: at({ 'requirement.part.depthWanted': 0.5e-3, 'tank.operatingFrequency.value': 2e4 }),
    not: at({ 'requirement.part.depthWanted': 1e-3, 'tank.operatingFrequency.value': 2e4 }),
  },
  {
    code: 'surface-overheats',
    rule: surfaceOverheats,
    raises: at({ 'requirement.process.highestSurfaceTemperatureC': 870 }),
    not: at({ 'requirement.process.highestSurfaceTemperatureC': 2000 }),
  },
  {
    code: 'near-melting',
    rule: nearMelting,
    raises: at({ 'geometry.material.solidusC': 900 }),
    not: at({ 'geometry.material.solidusC': 1400, 'requirement.part.depthWanted': 1e-3 }),
    severity: 'caution',
  },
  {
    code: 'near-melting',
    rule: nearMelting,
    raises: at({ 'geometry.material.solidusC': 870 }),
    not: at({ 'geometry.material.solidusC': null }),
    severity: 'blocker',
  },
  { code: 'curie-crossing', rule: curieCrossing, raises: curie(880), not: curie(600) },
  {
    code: 'coil-efficiency-low',
    rule: lowEfficiency,
    raises: at({ 'hot.efficiency.value': 0.3 }),
    not: at({ 'hot.efficiency.value': 0.7 }),
  },
  {
    code: 'q-out-of-range',
    rule: qOutOfRange,
    raises: at({ 'tank.q.value': 1.5 }),
    not: at({ 'tank.q.value': 5 }),
  },
  {
    code: 'q-out-of-range',
    rule: qOutOfRange,
    raises: at({ 'tank.q.value': 80 }),
    not: at({ 'tank.q.value': 50 }),
  },
  {
    code: 'device-voltage',
    rule: deviceVoltage,
    raises: pushPull({ dcVoltage: 48, devicePeakVoltage: 100 }),
    not: pushPull({ dcVoltage: 48, devicePeakVoltage: 250 }),
    severity: 'blocker',
  },
  {
    code: 'choke-saturates',
    rule: chokeSaturates,
    raises: pushPull({ dcVoltage: 48, chokeSaturationCurrent: 20, chokeInductance: 1e-4 }),
    not: pushPull({ dcVoltage: 48, chokeSaturationCurrent: 1e5, chokeInductance: 1e-4 }),
  },
  {
    code: 'load-mismatch',
    rule: pushPullOverload,
    raises: pushPull({ dcVoltage: 48, ratedPower: 1000 }),
    not: pushPull({ dcVoltage: 48, ratedPower: 1e7 }),
    severity: 'caution',
  },
  { code: 'start-up-caution', rule: startUp, raises: pushPull({}), not: () => base() },
];

describe('electrical and thermal rules', () => {
  it.each(cases)('$code is raised where it holds ($severity)', ({ code, rule, raises, severity }) => {
    const found = rule(raises()).filter((one) => one.code === code);
    expect(found.length).toBeGreaterThan(0);
    if (severity) expect(found[0]?.severity).toBe(severity);
    expect(found[0]?.message).not.toMatch(/[{}]|NaN|undefined/);
    expect(found[0]?.remedy.length).toBeGreaterThan(10);
  });

  it.each(cases)('$code is not raised beside it', ({ code, rule, not }) => {
    const found = rule(not()).filter((one) => one.code === code);
    expect(found.map((one) => one.message)).toEqual([]);
  });

  it('is a caution, not a blocker, when only one state is off the range', () => {
    const between = Math.sqrt(hz().cold.value * hz().hot.value);
    const found = frequencyBand(at({ 'requirement.machine.supply.frequencyMin': between })());
    expect(found[0]).toMatchObject({ code: 'frequency-below-band', severity: 'caution' });
  });

  it('says less than the power needed only when it is', () => {
    expect(needed().value).toBeLessThan(base().ladder[fittedIndex()]!.hot.powerIntoPart);
    expect(loadMismatch(weak(0.3)())[0]?.message).toContain('less than the part needs');
  });

  it('offers the row that fits as buttons', () => {
    const found = frequencyBand(
      at({
        'requirement.machine.supply.frequencyMin': hz().cold.value * 1.02,
        ladder: base().ladder.map((one, i) => ({ ...one, advised: i === fittedIndex() - 1 })),
      })(),
    );
    expect(found[0]?.fixes.length).toBeGreaterThan(0);
    expect(found[0]?.fixes[0]?.field).toMatch(/^machine\./);
  });
});
