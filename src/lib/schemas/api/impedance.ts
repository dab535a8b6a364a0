/** POST /api/v1/impedance: a coil alone or with a part, at a list of frequencies, as an LCR meter would see it. */
import { z } from 'zod';
import type { ImpedanceSweep, SweepResult } from '../../induction/check/impedance-sweep.ts';
import { solverSettingSchema } from './check.ts';
import { coilSchema } from './coil.ts';
import { materialChoiceSchema, workpieceSchema } from './part.ts';
import * as q from './quantity.ts';

/** A part's material by id or own values, or as plain resistivity and constant relative permeability. */
export const plainMaterialSchema = z
  .object({
    kind: z.literal('plain'),
    resistivity: q.number('Resistivity', 'Ω·m', { min: 1e-9, max: 1e6 }),
    relativePermeability: q.number('Relative permeability', '', { min: 1, max: 1e5 }),
  })
  .describe('Plain resistivity and constant relative permeability');

export const impedancePartSchema = workpieceSchema
  .pick({ form: true, outsideDiameter: true, insideDiameter: true, length: true, axialOffset: true })
  .extend({
    material: z.union([materialChoiceSchema, plainMaterialSchema]),
    temperatureC: q.temperatureC(
      'Part temperature',
      'Temperature of the whole part; ignored for a plain material',
    ),
  })
  .describe('Part in the coil');

export const impedanceRequestSchema = z
  .object({
    coil: coilSchema,
    part: impedancePartSchema.nullable(),
    includeLeads: z.boolean().describe('Whether the leads of the coil are part of the figures'),
    frequencies: z
      .array(q.frequency('Frequency'))
      .min(1, 'Give at least one frequency.')
      .max(50, 'At most 50 frequencies at once.'),
    current: q.current('Coil current', 'A rms; decides the permeability of magnetic steel').optional(),
    setting: solverSettingSchema.optional(),
  })
  .describe('A coil, an optional part and a list of frequencies') satisfies z.ZodType<ImpedanceSweep>;
export type ImpedanceRequest = z.infer<typeof impedanceRequestSchema>;

const impedanceSchema = z.object({
  inductance: z.number().describe('H'),
  resistance: z.number().describe('ohm'),
  q: z.number().describe('Quality factor ωL/R'),
  loadResistance: z.number().describe('Part of the resistance that heats the part, ohm'),
  efficiency: z.number().describe('loadResistance / resistance'),
  turnLossShare: z.array(z.number()).describe('Share of the coil’s own loss in each turn, adds up to 1'),
  turnVoltage: z.array(z.number()).describe('Voltage of each turn at 1 A rms, V'),
  method: z.string(),
  inductanceError: z.number().describe('Error of the model alone, as a fraction'),
  resistanceError: z.number().describe('Error of the model alone, as a fraction'),
  assumptions: z.array(z.string()),
});

export const impedanceResponseSchema = z
  .object({
    methodVersion: z.string(),
    results: z.array(
      z.object({
        frequency: z.number(),
        bare: impedanceSchema,
        loaded: impedanceSchema.nullable().describe('null without a part'),
      }),
    ),
  })
  .describe('Impedance at each frequency, bare and with the part') satisfies z.ZodType<SweepResult>;
export type ImpedanceResponse = z.infer<typeof impedanceResponseSchema>;
