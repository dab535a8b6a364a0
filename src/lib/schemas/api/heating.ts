/** POST and GET /api/v1/heatings: the heating transient as a job. */
import { z } from 'zod';
import { solverSettingSchema } from './check.ts';
import * as q from './quantity.ts';
import { requirementSchema } from './requirement.ts';

export const heatingDriveSchema = z
  .discriminatedUnion('kind', [
    z.object({ kind: z.literal('current'), current: q.current('Coil current', 'A rms') }),
    z.object({ kind: z.literal('power'), power: q.power('Power', 'Into the coil terminals') }),
    z.object({
      kind: z.literal('voltage'),
      voltage: q.voltage('Coil voltage', 'V rms at the coil terminals'),
    }),
  ])
  .describe('What the supply holds constant');

export const heatingRequestSchema = z
  .object({
    requirement: requirementSchema,
    drive: heatingDriveSchema.nullable().describe('null: deliverable power of the fitted row'),
    frequency: q.frequency('Frequency').nullable().describe('null: operating frequency of the fitted row'),
    duration: q
      .seconds('Duration')
      .nullable()
      .describe('null: the heating time of the process, or until the target is reached'),
    setting: solverSettingSchema.optional(),
  })
  .describe('A heating run');
export type HeatingRequest = z.infer<typeof heatingRequestSchema>;

export const heatingAcceptedSchema = z.object({ id: z.string() }).describe('The job that was made');

export const heatingCurvePointSchema = z.object({
  time: z.number().describe('s'),
  surfaceC: z.number(),
  meanC: z.number(),
  coreC: z.number(),
  power: z.number().describe('Into the part, W'),
  current: z.number().describe('Coil current, A rms'),
  inductance: z.number().describe('H'),
  resistance: z.number().describe('ohm'),
  frequency: z.number().describe('Hz'),
});

export const heatingResultSchema = z
  .object({
    methodVersion: z.string(),
    curve: z.array(heatingCurvePointSchema).max(400),
    curieTime: z.number().nullable().describe('When the surface passes the Curie temperature, s'),
    targetTime: z.number().nullable().describe('When the target is reached, s'),
    energyIntoPart: z.number().describe('J'),
    energyLost: z.number().describe('J'),
    energyStored: z.number().describe('J'),
    assumptions: z.array(z.string()),
  })
  .describe('Temperatures and electrical figures over time');

export const heatingStateSchema = z
  .object({
    id: z.string(),
    state: z.enum(['queued', 'running', 'done', 'failed', 'cancelled']),
    progress: z.number().min(0).max(1),
    message: z.string().nullable(),
    result: heatingResultSchema.nullable(),
  })
  .describe('A heating job');
