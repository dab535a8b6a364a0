import { describe, expect, it } from 'vitest';
import { narrowBand, wideBand } from './acceptance.ts';
import { baseContext, changed, examined, type RuleCase } from './case-context.ts';
import { fieldAtOperator, fixtureOverheats, metalInField } from './surroundings.ts';
import { testPressureHigh, workingPressureHigh } from './tube.ts';
import {
  belowInterlock,
  noWater,
  waterFast,
  waterHot,
  waterLaminar,
  waterPressureShort,
  waterShort,
} from './water.ts';

const base = baseContext;
const at = (values: Record<string, unknown>) => () => changed(base(), values);
const line = (low: number, high: number) =>
  at({
    'requirement.acceptance.0': {
      ...base().requirement.acceptance[0],
      nominal: 1e-6,
      low: low * 1e-6,
      high: high * 1e-6,
    },
  });
const metal = (r: number) => () =>
  examined(
    (q) =>
      (q.fixture.metalParts = [
        { name: 'clamp', r, z: 0, size: 0.02, material: { kind: 'library', id: 'steel-c45' } },
      ]),
  );

const cases: RuleCase[] = [
  {
    code: 'water-short',
    rule: waterShort,
    raises: at({ 'water.outletTemperature.value': 60 }),
    not: at({ 'water.outletTemperature.value': 45 }),
    severity: 'caution',
  },
  {
    code: 'water-short',
    rule: waterShort,
    raises: at({ 'water.outletTemperature.value': 99 }),
    not: at({ 'water.outletTemperature.value': 45 }),
    severity: 'blocker',
  },
  {
    code: 'water-short',
    rule: waterPressureShort,
    raises: at({ 'water.pressureDrop.value': 5e5 }),
    not: at({ 'water.pressureDrop.value': 1e5 }),
    severity: 'caution',
  },
  {
    code: 'water-hot',
    rule: waterHot,
    raises: at({ 'water.wallTemperature.value': 85 }),
    not: at({ 'water.wallTemperature.value': 75 }),
  },
  {
    code: 'water-fast',
    rule: waterFast,
    raises: at({ 'water.velocity.value': 3 }),
    not: at({ 'water.velocity.value': 2 }),
    severity: 'note',
  },
  {
    code: 'water-laminar',
    rule: waterLaminar,
    raises: () => examined((r) => (r.machine.water.flow = 0.8e-3 / 60)),
    not: () => base(),
  },
  {
    code: 'flow-below-interlock',
    rule: belowInterlock,
    raises: at({ 'requirement.machine.water.interlockFlow': 1e-3 }),
    not: at({ 'requirement.machine.water.interlockFlow': 1e-5 }),
    severity: 'blocker',
  },
  {
    code: 'working-pressure-high',
    rule: workingPressureHigh,
    raises: at({ 'requirement.machine.water.supplyPressure': 8e6 }),
    not: at({ 'requirement.machine.water.supplyPressure': 4e5 }),
    severity: 'blocker',
  },
  {
    code: 'test-pressure-high',
    rule: testPressureHigh,
    raises: at({ 'mechanics.testPressure': 1.2e7 }),
    not: at({ 'mechanics.testPressure': 1e6 }),
    severity: 'blocker',
  },
  { code: 'metal-in-field', rule: metalInField, raises: metal(0.06), not: metal(0.8) },
  { code: 'fixture-overheats', rule: fixtureOverheats, raises: metal(0.06), not: metal(0.8) },
  {
    code: 'field-at-operator',
    rule: fieldAtOperator,
    raises: () => examined((r) => (r.fixture.operatorDistance = 0.25)),
    not: () => base(),
    severity: 'caution',
  },
  {
    code: 'acceptance-band-wide',
    rule: wideBand,
    raises: () => line(0.4, 1.9)(),
    not: () => line(0.96, 1.04)(),
  },
  {
    code: 'acceptance-band-narrow',
    rule: narrowBand,
    raises: () => line(0.998, 1.002)(),
    not: () => line(0.94, 1.06)(),
    severity: 'caution',
  },
  {
    code: 'water-short',
    rule: noWater,
    raises: () =>
      examined(
        (r) =>
          (r.machine.water = { ...r.machine.water, flow: null, supplyPressure: 1e5, returnPressure: 2e5 }),
      ),
    not: () => base(),
    severity: 'blocker',
  },
];

describe('rules of water, pressure and site', () => {
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
});
