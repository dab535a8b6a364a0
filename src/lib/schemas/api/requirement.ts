/** The requirement as JSON: SI base units, temperatures in °C, null means not known or not asked. */
import { z } from 'zod';
import type { Requirement, Unit } from '../../induction/check/types.ts';
import { coilSchema } from './coil.ts';
import { machineSchema } from './machine.ts';
import { materialChoiceSchema, processSchema, workpieceSchema } from './part.ts';
import * as q from './quantity.ts';

const units = [
  'H',
  'F',
  'Hz',
  'ohm',
  'V',
  'A',
  'W',
  'var',
  'VA',
  'm',
  'm2',
  'kg',
  's',
  'J',
  'K',
  'C',
  'Pa',
  'm3/s',
  'm/s',
  'T',
  'W/m2',
  'deg',
  '1',
] as const satisfies readonly Unit[];
export const unitSchema = z.enum(units).describe('SI unit; C is degrees Celsius, 1 a plain number');

export const fixtureSchema = z
  .object({
    kind: z.enum(['none', 'nest', 'support', 'rotating-centre', 'other']),
    material: q.text('Fixture material', 200),
    datum: q.text('Datum', 500),
    contact: q.text('Contact', 500, 'What touches the part'),
    contactTemperatureC: q.temperatureC('Contact temperature').nullable(),
    metalParts: z
      .array(
        z.object({
          name: q.text('Name', 120),
          r: q.place('Distance from the axis'),
          z: q.place('Distance from the coil’s middle along the axis'),
          size: q.length('Size', 'Diameter of the equivalent sphere'),
          material: materialChoiceSchema,
        }),
      )
      .max(40, 'At most 40 metal parts.')
      .describe('Metal parts near the coil'),
    operatorDistance: q
      .lengthOrZero('Operator distance', 'Distance of the person’s place from the coil’s middle')
      .nullable(),
    acceptance: z.array(q.text('Acceptance line', 500)).max(40),
  })
  .describe('Fixture');

const anyValue = (name: string) =>
  q.number(name, '', { min: -1e12, max: 1e12 }, `${name}, in the line's unit`);

export const acceptanceLineSchema = z
  .object({
    id: q.text('Id', 80),
    kind: z.enum([
      'inductance',
      'resistance',
      'inside-diameter',
      'pitch',
      'length',
      'hydrostatic',
      'flow',
      'insulation',
      'dc-resistance',
      'document',
      'other',
    ]),
    label: q.text('Label', 200),
    basis: z.enum(['computed', 'buyer', 'golden-coil']),
    nominal: anyValue('Nominal').nullable(),
    low: anyValue('Low limit').nullable(),
    high: anyValue('High limit').nullable(),
    unit: unitSchema,
    testFrequency: q.frequency('Test frequency').nullable(),
    temperatureC: q.temperatureC('Temperature').nullable(),
    measuringPlane: q.text('Measuring plane', 200),
    leadState: q.text('Lead state', 200),
    holdTime: q.number('Hold time', 's', { min: 0, max: 1e6 }).nullable(),
    differentialPressure: q.pressure('Differential pressure').nullable(),
    note: q.text('Note', 1000),
  })
  .refine((line) => line.low === null || line.high === null || line.low <= line.high, {
    path: ['low'],
    error: 'The low limit is above the high limit.',
  })
  .describe('One line of acceptance');

export const requirementSchema = z
  .object({
    machine: machineSchema,
    part: workpieceSchema,
    process: processSchema,
    coil: coilSchema,
    fixture: fixtureSchema,
    acceptance: z.array(acceptanceLineSchema).max(60, 'At most 60 acceptance lines.'),
    designResponsibility: z.enum(['to-drawing', 'to-checked-figures', 'to-result']),
  })
  .describe(
    'What is asked: machine, part, process, coil, fixture, acceptance',
  ) satisfies z.ZodType<Requirement>;
