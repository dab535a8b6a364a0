import { readFileSync, readdirSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { findingCodes } from '../types.ts';
import { baseContext, changed, examined, type RuleCase } from './case-context.ts';
import { missingConnection, missingHanding } from './connection.ts';
import { gapLarge, gapSmall, turnInsulation } from './gaps.ts';
import { impossibleDimensions } from './dimensions.ts';
import {
  disagreeingMass,
  notCoupling,
  openTurns,
  outsideMethod,
  touchingPart,
  touchingTurns,
} from './geometry.ts';
import { leadsDominate, notStocked, thinWall, tightBend, wallFactor } from './tube.ts';
import { mistakenFactor, unitDoubts } from './unit-doubt.ts';

const base = baseContext;
const at = (values: Record<string, unknown>) => () => changed(base(), values);
const rubber = {
  kind: 'own',
  own: {
    name: 'Rubber',
    resistivity20: null,
    resistivityHot: null,
    relativePermeability: 1,
    saturationFluxDensity: null,
    curieTemperatureC: null,
    density: 1200,
    specificHeat: 1500,
    thermalConductivity: 0.2,
    emissivity: null,
    solidusC: null,
  },
} as const;

const cases: RuleCase[] = [
  {
    code: 'dimension-impossible',
    rule: impossibleDimensions,
    raises: () => examined((r) => (r.coil.tube = { kind: 'round', outsideDiameter: 0.01, wall: 0.006 })),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'dimension-impossible',
    rule: impossibleDimensions,
    raises: () => examined((r) => (r.part.length = Number.NaN)),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'turns-open',
    rule: openTurns,
    raises: () => examined((r) => r.coil.winding.shape === 'helix' && (r.coil.winding.turns = null)),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'turns-touch',
    rule: touchingTurns,
    raises: () => examined((r) => r.coil.winding.shape === 'helix' && (r.coil.winding.pitch = 0.0095)),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'turns-touch',
    rule: touchingTurns,
    raises: at({ 'mechanics.clearanceBetweenTurns': 0.5e-3 }),
    not: at({ 'mechanics.clearanceBetweenTurns': 3e-3 }),
    severity: 'caution',
  },
  {
    code: 'part-touches-coil',
    rule: touchingPart,
    raises: () => examined((r) => (r.part.outsideDiameter = 0.05)),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'part-touches-coil',
    rule: touchingPart,
    raises: at({ 'mechanics.radialClearanceHot': -1e-4 }),
    not: at({ 'mechanics.radialClearanceHot': 1e-4 }),
    severity: 'blocker',
  },
  {
    code: 'part-does-not-couple',
    rule: notCoupling,
    raises: () => examined((r) => (r.part.material = structuredClone(rubber))),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'outside-method',
    rule: outsideMethod,
    raises: at({ 'requirement.process.mode': 'scan' }),
    not: at({ 'requirement.process.mode': 'single-shot' }),
    severity: 'caution',
  },
  {
    code: 'outside-method',
    rule: outsideMethod,
    raises: at({ 'requirement.part.form': 'drawing' }),
    not: () => base(),
    severity: 'caution',
  },
  {
    code: 'outside-method',
    rule: outsideMethod,
    raises: at({ 'sanity.difference': 0.2 }),
    not: at({ 'sanity.difference': -0.05 }),
    severity: 'caution',
  },
  {
    code: 'mass-disagrees',
    rule: disagreeingMass,
    raises: at({ 'requirement.part.weighedMass': 2 }),
    not: at({ 'requirement.part.weighedMass': 1.19 }),
  },
  {
    code: 'unit-doubt',
    rule: unitDoubts,
    raises: at({ 'requirement.coil.winding.insideDiameter': 0.048 * 25.4 }),
    not: at({ 'requirement.coil.winding.insideDiameter': 0.1 }),
  },
  {
    code: 'unit-doubt',
    rule: unitDoubts,
    raises: at({ 'requirement.machine.supply.frequencyMin': 20 }),
    not: at({ 'requirement.machine.supply.frequencyMin': 50 }),
  },
  {
    code: 'coupling-gap-small',
    rule: gapSmall,
    raises: at({ 'mechanics.radialClearanceHot': 0.8e-3 }),
    not: at({ 'mechanics.radialClearanceHot': 3e-3 }),
  },
  {
    code: 'coupling-gap-large',
    rule: gapLarge,
    raises: at({ 'mechanics.radialClearanceCold': 0.012 }),
    not: at({ 'mechanics.radialClearanceCold': 0.006 }),
  },
  {
    code: 'turn-insulation-needed',
    rule: turnInsulation,
    raises: at({ 'requirement.coil.insulation.kind': 'none', 'mechanics.clearanceBetweenTurns': 0.05e-3 }),
    not: at({ 'requirement.coil.insulation.kind': 'none', 'mechanics.clearanceBetweenTurns': 3e-3 }),
  },
  {
    code: 'tube-wall-thin',
    rule: thinWall,
    raises: at({ 'requirement.coil.tube.wall': 0.4e-3 }),
    not: at({ 'requirement.coil.tube.wall': 1e-3 }),
    severity: 'caution',
  },
  {
    code: 'bend-too-tight',
    rule: tightBend,
    raises: at({ 'path.bendRadius': 0.012 }),
    not: at({ 'path.bendRadius': 0.03 }),
    severity: 'blocker',
  },
  {
    code: 'bend-too-tight',
    rule: tightBend,
    raises: at({ 'path.bendRadius': 0.018 }),
    not: at({ 'path.bendRadius': 0.02 }),
    severity: 'caution',
  },
  {
    code: 'tube-not-stocked',
    rule: notStocked,
    raises: at({ 'requirement.coil.tube.wall': 0.0015 }),
    not: at({ 'requirement.coil.tube.wall': 0.0009 }),
    severity: 'note',
  },
  {
    code: 'leads-dominate',
    rule: leadsDominate,
    raises: at({ 'leads.inductance.value': 2.5e-7 }),
    not: at({ 'leads.inductance.value': 5e-8 }),
  },
  {
    code: 'connection-missing',
    rule: missingConnection,
    raises: at({ 'requirement.machine.connection': null }),
    not: () => base(),
    severity: 'blocker',
  },
  {
    code: 'handing-missing',
    rule: missingHanding,
    raises: at({ 'requirement.coil.handing.windingDirection': null }),
    not: () => base(),
    severity: 'blocker',
  },
];

describe('rules of construction', () => {
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

  it('recognises the factor between the units', () => {
    expect(mistakenFactor(40, [1e-3, 1.5])).toBeCloseTo(1 / 1000, 3);
    expect(mistakenFactor(0.05, [1e-3, 1.5])).toBeNull();
    expect(mistakenFactor(Number.NaN, [1, 2])).toBeNull();
  });

  it('has the wall factors of the practice table', () => {
    // t/δ 0.5 2.01, 1 1.086, 2 0.949 (plane conductor of finite thickness).
    expect(wallFactor(0.5)).toBeCloseTo(2.01, 2);
    expect(wallFactor(1)).toBeCloseTo(1.086, 3);
    expect(wallFactor(2)).toBeCloseTo(0.949, 3);
  });

  it('tests every code of the vocabulary', () => {
    const folder = new URL('.', import.meta.url);
    const text = readdirSync(folder)
      .filter((name) => name.endsWith('.test.ts'))
      .map((name) => readFileSync(new URL(name, folder), 'utf8'))
      .join('\n');
    expect(findingCodes.filter((code) => !text.includes(`code: '${code}'`))).toEqual([]);
  });
});
