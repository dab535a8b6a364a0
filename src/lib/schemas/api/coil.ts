/** The coil as JSON. Diameters and openings are to the copper surface, pitches centre to centre. */
import { z } from 'zod';
import type { Coil } from '../../induction/check/types.ts';
import * as q from './quantity.ts';

const turns = q.number('Turns', '', { min: 0.5, max: 200 }, 'Turns; null asks for a proposal').nullable();
const pitch = q.length('Pitch', 'Pitch, centre to centre');
const clearance = q.lengthOrZero('Clearance', 'Radial clearance to the part, per side').nullable();
const opening = (name: string) => q.length(name, `${name}, clear opening to the copper surface`);

export const windingSchema = z
  .discriminatedUnion('shape', [
    z.object({
      shape: z.literal('helix'),
      insideDiameter: opening('Inside diameter').nullable(),
      clearance,
      turns,
      pitch,
    }),
    z.object({
      shape: z.literal('conical'),
      insideDiameter: opening('Inside diameter'),
      endInsideDiameter: opening('Inside diameter of the last turn'),
      turns,
      pitch,
    }),
    z.object({
      shape: z.literal('stepped'),
      insideDiameters: z
        .array(opening('Inside diameter'))
        .min(1, 'At least one turn.')
        .max(200, 'At most 200 turns.'),
      pitch,
    }),
    z.object({
      shape: z.literal('pancake'),
      insideDiameter: opening('Inside diameter of the first turn'),
      turns,
      pitch: q.length('Pitch', 'Radial pitch'),
      faceGap: q.lengthOrZero('Face gap', 'From the tube surface to the part’s face'),
    }),
    z.object({
      shape: z.literal('single-turn'),
      insideDiameter: opening('Inside diameter').nullable(),
      clearance,
    }),
    z.object({
      shape: z.literal('bore'),
      outsideDiameter: q
        .length('Outside diameter', 'Over the copper: the coil goes inside the part')
        .nullable(),
      clearance,
      turns,
      pitch,
    }),
    z.object({
      shape: z.enum(['racetrack', 'rectangular-helix']),
      insideLength: opening('Inside length'),
      insideWidth: opening('Inside width'),
      cornerRadius: q.lengthOrZero('Corner radius', 'Inside corner radius'),
      turns,
      pitch,
    }),
    z.object({
      shape: z.literal('hairpin'),
      length: q.length('Hairpin length'),
      legGap: q.length('Leg gap', 'Clear distance between the legs'),
      turns,
      pitch,
    }),
    z.object({
      shape: z.literal('channel'),
      insideLength: opening('Inside length'),
      insideWidth: opening('Inside width'),
      crossingHeight: q.lengthOrZero('Crossing height', 'Height of the raised crossing'),
      turns,
      pitch,
    }),
    z.object({ shape: z.literal('drawing'), note: q.text('Note', 1000) }),
  ])
  .describe('Winding');

export const tubeSectionSchema = z
  .discriminatedUnion('kind', [
    z.object({
      kind: z.literal('round'),
      outsideDiameter: q.length('Tube outside diameter'),
      wall: q.length('Tube wall'),
    }),
    z.object({
      kind: z.literal('square'),
      side: q.length('Tube side'),
      wall: q.length('Tube wall'),
      cornerRadius: q.lengthOrZero('Tube corner radius'),
    }),
    z.object({
      kind: z.literal('rectangular'),
      axialWidth: q.length('Tube width', 'Along the coil’s axis'),
      radialHeight: q.length('Tube height', 'Across the coil’s axis'),
      wall: q.length('Tube wall'),
      cornerRadius: q.lengthOrZero('Tube corner radius'),
    }),
  ])
  .describe('Conductor section');

export const leadsSchema = z
  .object({
    length: q.lengthOrZero('Lead length', 'Of each of the two leads, last turn to contact face'),
    spacing: q.length('Lead spacing', 'Centre to centre'),
  })
  .describe('Leads');

export const handingSchema = z
  .object({
    windingDirection: z.enum(['right', 'left']).nullable(),
    leadExit: z.enum(['axial', 'radial', 'tangential']).nullable(),
    leadAngleDeg: q
      .number('Lead angle', '°', { min: -360, max: 360 }, 'Angle between the leads seen along the axis')
      .nullable(),
    upEnd: z.enum(['lead-end', 'far-end', 'horizontal']).nullable(),
    firstTurnFromFace: q
      .lengthOrZero('First turn from face', 'First turn’s centre from the contact face')
      .nullable(),
  })
  .describe('How the coil sits on the machine');

export const coilSchema = z
  .object({
    winding: windingSchema,
    tube: tubeSectionSchema,
    copperGrade: z.enum(['cu-etp', 'cu-of', 'cu-dhp']),
    copperTemperatureC: q
      .temperatureC('Copper temperature', 'Copper temperature the figures are for; null = 40 °C')
      .nullable(),
    leads: leadsSchema.nullable(),
    handing: handingSchema,
    diameterTolerance: q.lengthOrZero('Opening tolerance', '± on the opening').nullable(),
    pitchTolerance: q.lengthOrZero('Pitch tolerance', '± on the pitch').nullable(),
    support: z.object({
      kind: z.enum(['none', 'studs', 'boards', 'potting']),
      count: q.count('Supports', { min: 0, max: 100 }),
    }),
    centreTap: z.boolean().describe('Whether the middle of the winding is brought out'),
    insulation: z.object({
      kind: z.enum(['none', 'sleeve', 'enamel', 'ceramic', 'tape']),
      thickness: q.lengthOrZero('Insulation thickness'),
    }),
    waterCircuits: q.count('Water circuits', { min: 1, max: 40 }, 'Parallel water circuits'),
  })
  .describe('Coil') satisfies z.ZodType<Coil>;
