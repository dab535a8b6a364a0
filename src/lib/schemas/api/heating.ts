/** POST and GET /api/v1/heatings: the heating transient as a job. */
import { z } from 'zod';
import type { HeatingResult } from '../../induction/heating/types.ts';
import { solverSettingSchema } from './check.ts';
import * as q from './quantity.ts';
import { requirementSchema } from './requirement.ts';

export const heatingDriveSchema = z
  .discriminatedUnion('kind', [
    z.object({ kind: z.literal('current'), current: q.current('Coil current', 'A rms') }),
    z.object({ kind: z.literal('power'), power: q.power('Power', 'Into coil, leads and part together') }),
    z.object({
      kind: z.literal('voltage'),
      voltage: q.voltage('Voltage', 'V rms across coil, leads and fixed circuit'),
    }),
  ])
  .describe('What the supply holds constant');

export const heatingRequestSchema = z
  .object({
    requirement: requirementSchema,
    drive: heatingDriveSchema.nullable().describe('null: deliverable power of the fitted row'),
    frequency: q
      .frequency('Frequency')
      .nullable()
      .describe('null: the frequency follows the fitted bank [Hz]'),
    duration: q
      .seconds('Duration')
      .nullable()
      .describe('null: the time asked, ending early when the surface reaches the target [s]'),
    setting: solverSettingSchema.optional(),
  })
  .describe('A heating run');
export type HeatingRequest = z.infer<typeof heatingRequestSchema>;

export const heatingAcceptedSchema = z.object({ id: z.string() }).describe('The job that was made');

export const heatingCurvePointSchema = z.object({
  time: z.number().describe('s'),
  surfaceC: z.number().describe('Surface towards the coil, at its middle [°C]'),
  meanC: z.number().describe('Mean over the part [°C]'),
  coreC: z.number().describe('Axis, or far side of a wall [°C]'),
  hottestC: z.number().describe('Hottest place of the surface [°C]'),
  partPower: z.number().describe('Into the part [W]'),
  totalPower: z.number().describe('Into coil, leads, fixed circuit and part [W]'),
  surfaceLoss: z.number().describe('Radiation and convection [W]'),
  current: z.number().describe('Coil current [A rms]'),
  voltage: z.number().describe('Across coil, leads and fixed circuit [V rms]'),
  inductance: z.number().describe('With leads and fixed circuit [H]'),
  resistance: z.number().describe('With leads and fixed circuit [ohm]'),
  frequency: z.number().describe('Hz'),
});

export const heatingResultSchema = z
  .object({
    curve: z.array(heatingCurvePointSchema).max(400),
    curieSurfaceTime: z.number().nullable().describe('When the surface passes the Curie temperature [s]'),
    curieCoreTime: z.number().nullable().describe('When the core passes it [s]'),
    curieTemperatureC: z.number().nullable(),
    balance: z
      .object({
        input: z.number(),
        stored: z.number(),
        lost: z.number(),
        closure: z.number().describe('(stored + lost)/input − 1'),
        coilLoss: z.number(),
      })
      .describe('Energies over the run [J]'),
    end: z.enum(['time', 'target', 'melting', 'stopped', 'limit']),
    time: z.number().describe('Time reached [s]'),
    fieldSolutions: z.number(),
    fieldUpdates: z.number(),
    steps: z.number(),
    method: z.string(),
    assumptions: z.array(z.string()),
  })
  .describe('Temperatures and electrical figures over time') satisfies z.ZodType<HeatingResult>;

export const heatingStateSchema = z
  .object({
    id: z.string(),
    state: z.enum(['queued', 'running', 'done', 'failed', 'cancelled']),
    progress: z.number().min(0).max(1),
    message: z.string().nullable(),
    methodVersion: z.string(),
    result: heatingResultSchema.nullable(),
  })
  .describe('A heating job');
