import { describe, expect, it } from 'vitest';
import { runHeating } from '../heating/run-heating.ts';
import { checkRequirement } from './check-requirement.ts';
import { exampleRequirement } from './examples.ts';
import { plainRequirement } from './findings/case-context.ts';
import { heatingInputOf } from './heating-run.ts';
import { impedanceSweep, type ImpedanceSweep } from './impedance-sweep.ts';

describe('impedance over frequencies', () => {
  const sweep = (): ImpedanceSweep => ({
    coil: exampleRequirement().coil,
    part: {
      form: 'cylinder',
      outsideDiameter: 0.04,
      insideDiameter: 0,
      length: 0.12,
      axialOffset: 0,
      temperatureC: 20,
      material: { kind: 'plain', resistivity: 1.15e-6, relativePermeability: 1 },
    },
    includeLeads: false,
    frequencies: [1e4, 4e4],
    setting: 'preview',
  });

  it('answers bare and loaded, with less inductance and more resistance with the part', () => {
    const answer = impedanceSweep(sweep());
    if (!answer.ok) throw new Error(answer.message);
    expect(answer.result.results.map((one) => one.frequency)).toEqual([1e4, 4e4]);
    for (const { frequency, bare, loaded } of answer.result.results) {
      expect(loaded?.inductance).toBeLessThan(bare.inductance);
      expect(loaded?.resistance).toBeGreaterThan(bare.resistance);
      expect(bare.loadResistance).toBe(0);
      expect(bare.q).toBeCloseTo((2 * Math.PI * frequency * bare.inductance) / bare.resistance, 9);
      expect(bare.turnLossShare.reduce((a, b) => a + b, 0)).toBeCloseTo(1, 9);
    }
  });

  it('adds the leads when asked', () => {
    const without = impedanceSweep({ ...sweep(), part: null });
    const withLeads = impedanceSweep({ ...sweep(), part: null, includeLeads: true });
    if (!without.ok || !withLeads.ok) throw new Error('both are inside the method');
    expect(withLeads.result.results[0]?.bare.inductance).toBeGreaterThan(
      (without.result.results[0]?.bare.inductance ?? 0) + 3e-8,
    );
    expect(without.result.results[0]?.loaded).toBeNull();
  });

  it('names the field of what cannot be computed', () => {
    const bad = sweep();
    bad.coil.tube = { kind: 'round', outsideDiameter: 0.01, wall: 0.008 };
    expect(impedanceSweep(bad)).toMatchObject({ ok: false, field: 'coil.tube.wall' });
  });
});

describe('heating run of a requirement', () => {
  it('starts from the deliverable power and reaches about the energy balance’s time', () => {
    const requirement = plainRequirement();
    requirement.part.depthWanted = null;
    requirement.part.heatedLength = null;
    requirement.part.length = 0.06;
    requirement.process.time = null;
    requirement.process.targetTemperatureC = 400;
    const check = checkRequirement(requirement, { setting: 'preview', bands: false });
    const answer = heatingInputOf(requirement, check, {
      drive: null,
      frequency: null,
      duration: 4,
      setting: 'preview',
    });
    if (!answer.ok) throw new Error(answer.message);
    const result = runHeating(answer.input);
    const expected = check.tank?.operatingFrequency.value ?? 0;
    const last = result.curve.at(-1);
    // The run's tank leaves the magnetising inductance out and follows the part's own temperature: a few per cent.
    expect((last?.frequency ?? 0) / expected).toBeGreaterThan(0.93);
    expect((last?.frequency ?? 0) / expected).toBeLessThan(1.07);
    expect(
      (last?.partPower ?? 0) / (check.chain.find((step) => step.name === 'part')?.power.value ?? 1),
    ).toBeCloseTo(1, 1);
  });

  it('says why there is nothing to run', () => {
    const requirement = plainRequirement();
    requirement.coil.winding = { shape: 'hairpin', length: 0.2, legGap: 0.03, turns: 1, pitch: 0.012 };
    const check = checkRequirement(requirement, { setting: 'preview', bands: false });
    expect(
      heatingInputOf(requirement, check, { drive: null, frequency: null, duration: 4, setting: 'preview' }),
    ).toMatchObject({ ok: false });
  });
});
