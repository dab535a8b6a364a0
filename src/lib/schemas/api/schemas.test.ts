import { describe, expect, it } from 'vitest';
import { z } from 'zod';
import { checkRequirement } from '../../induction/check/check-requirement.ts';
import { impedanceSweep } from '../../induction/check/impedance-sweep.ts';
import { checkRequestSchema, checkResultSchema } from './check.ts';
import { exampleMachine, exampleRequirement } from './examples.ts';
import { heatingRequestSchema, heatingStateSchema } from './heating.ts';
import { impedanceRequestSchema, impedanceResponseSchema } from './impedance.ts';
import { machineSchema } from './machine.ts';
import { requirementSchema } from './requirement.ts';

describe('API schemas', () => {
  it('take the example machine and requirement unchanged', () => {
    expect(machineSchema.parse(exampleMachine())).toEqual(exampleMachine());
    expect(requirementSchema.parse(exampleRequirement())).toEqual(exampleRequirement());
  });

  it('say in plain words what is wrong with a number', () => {
    const bad = exampleRequirement();
    bad.part.outsideDiameter = Number.NaN;
    bad.process.time = -1;
    const parsed = requirementSchema.safeParse(bad);
    const messages = parsed.error?.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
    expect(messages).toEqual([
      'part.outsideDiameter: Outside diameter of the part must be a number from 0.000001 to 20 m.',
      'process.time: Heating time must be a number from 0.001 to 10000000 s.',
    ]);
  });

  it('refuse a fitted tap that is not there and an acceptance band upside down', () => {
    const bad = exampleRequirement();
    if (bad.machine.transformer) bad.machine.transformer.fittedTap = 9;
    Object.assign(bad.acceptance[0] ?? {}, { low: 2, high: 1 });
    const paths = requirementSchema.safeParse(bad).error?.issues.map((issue) => issue.path.join('.'));
    expect(paths).toEqual(['machine.transformer.fittedTap', 'acceptance.0.low']);
  });

  it('refuse a winding whose shape is unknown', () => {
    const bad = {
      ...exampleRequirement(),
      coil: { ...exampleRequirement().coil, winding: { shape: 'knot' } },
    };
    expect(requirementSchema.safeParse(bad).success).toBe(false);
  });

  it('take what the check answers, with and without figures, and what the sweep answers', () => {
    const requirement = exampleRequirement();
    requirement.part.material = { kind: 'library', id: 'stainless-304' };
    const check = checkRequirement(requirement, { setting: 'preview', bands: false });
    expect(checkResultSchema.parse(check)).toEqual(check);
    requirement.coil.winding = { shape: 'drawing', note: '' };
    const without = checkRequirement(requirement, { setting: 'preview', bands: false });
    expect(checkResultSchema.parse(without)).toEqual(without);
    const sweep = impedanceSweep({
      coil: exampleRequirement().coil,
      part: null,
      includeLeads: true,
      frequencies: [2e4],
      setting: 'preview',
    });
    if (!sweep.ok) throw new Error(sweep.message);
    expect(impedanceResponseSchema.parse(sweep.result)).toEqual(sweep.result);
  });

  it('can be written as JSON schema with units in the descriptions', () => {
    for (const schema of [
      checkRequestSchema,
      checkResultSchema,
      impedanceRequestSchema,
      impedanceResponseSchema,
      heatingRequestSchema,
      heatingStateSchema,
    ]) {
      const json = JSON.stringify(z.toJSONSchema(schema));
      expect(json).toContain('"type":"object"');
    }
    expect(JSON.stringify(z.toJSONSchema(requirementSchema))).toContain('Outside diameter of the part [m]');
  });
});
