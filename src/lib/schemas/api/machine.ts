/** The machine as JSON: SI base units, null means not known. */
import { z } from 'zod';
import type { Machine } from '../../induction/check/types.ts';
import * as q from './quantity.ts';

export const tankKindSchema = z
  .enum(['series', 'parallel', 'choke-parallel', 'push-pull', 'not-known'])
  .describe('How the supply drives the tank');

export const supplySchema = z
  .object({
    frequencyMin: q.frequency('Lowest frequency').nullable(),
    frequencyMax: q.frequency('Highest frequency').nullable(),
    ratedPower: q.power('Rated power').nullable(),
    voltageLimit: q.voltage('Voltage limit', 'Largest rms voltage at the inverter output').nullable(),
    currentLimit: q.current('Current limit', 'Largest rms current at the inverter output').nullable(),
    dcVoltage: q.voltage('DC voltage', 'DC supply of a self-resonant push-pull stage').nullable(),
    devicePeakVoltage: q
      .voltage('Device voltage', 'Peak voltage rating of one device of a push-pull stage')
      .nullable(),
    chokeInductance: q
      .inductance('Choke inductance', 'Feeding choke of a push-pull or choke-fed stage')
      .nullable(),
    chokeSaturationCurrent: q.current('Choke saturation current').nullable(),
  })
  .describe('Power supply; limits are those at the inverter output');

export const transformerSchema = z
  .object({
    ratios: z
      .array(q.number('Ratio', '', { min: 1e-3, max: 1000 }, 'Primary turns per secondary turn'))
      .min(1, 'A transformer has at least one tap.')
      .max(40, 'At most 40 taps.')
      .describe('Selectable taps'),
    fittedTap: q.count('Fitted tap', { min: 0, max: 39 }, 'Index into ratios of the tap connected now'),
    leakageInductance: q.inductance('Leakage inductance', 'Referred to the primary').nullable(),
    magnetisingInductance: q.inductance('Magnetising inductance', 'Seen from the primary').nullable(),
    windingResistance: q.resistance('Winding resistance', 'Referred to the primary').nullable(),
    bankSide: z
      .enum(['primary', 'secondary'])
      .describe('Which side of the transformer the capacitor bank is on'),
    voltsPerHertzLimit: q
      .number('Volts per hertz', 'V/Hz', { min: 1e-9, max: 1e4 }, 'Largest primary volts per hertz')
      .nullable(),
    apparentPowerLimit: q.number('Apparent power limit', 'VA', { min: 1e-3, max: 1e10 }).nullable(),
  })
  .refine((t) => t.fittedTap < t.ratios.length, {
    path: ['fittedTap'],
    error: 'The fitted tap is not one of the ratios.',
  })
  .describe('Output transformer');

export const fixedCircuitSchema = z
  .object({
    inductance: q
      .inductance('Fixed inductance', 'Bus and head between bank or transformer and the coil terminals')
      .nullable(),
    inductanceBand: q.fraction('Fixed inductance band', 'Half width of its band').nullable(),
    resistance: q.resistance('Fixed resistance').nullable(),
    strayCapacitance: q
      .number('Stray capacitance', 'F', { min: -1, max: 1 }, 'Across the tank, not in the bank')
      .nullable(),
    calibration: z
      .object({
        date: z.string().regex(/^\d{4}-\d{2}-\d{2}$/, 'The date is written YYYY-MM-DD.'),
        method: q.text('Method', 200),
      })
      .nullable()
      .describe('Set once the machine was calibrated'),
  })
  .describe('Bus and head');

export const bankGroupSchema = z
  .object({
    unitCapacitance: q.capacitance('Unit capacitance', 'Capacitance of one unit'),
    tolerance: q.fraction('Capacitance tolerance'),
    count: q.count('Units owned', { min: 0, max: 500 }),
    positions: q.count('Positions', { min: 0, max: 500 }, 'Places for units on the machine'),
    unitsInSeries: q.count(
      'Units in series',
      { min: 1, max: 50 },
      'Units in series per string; strings are in parallel',
    ),
    fitted: q.count('Units fitted', { min: 0, max: 500 }, 'Units fitted now'),
    unitVoltageLimit: q.voltage('Voltage limit of a unit', 'V rms').nullable(),
    unitCurrentLimit: q.current('Current limit of a unit', 'A rms').nullable(),
    unitReactivePowerLimit: q.reactivePower('Reactive power limit of a unit').nullable(),
    lossTangent: q.number('Loss tangent', '', { min: 0, max: 1 }).nullable(),
  })
  .describe('A group of equal capacitors');

export const bankTotalSchema = z
  .object({
    label: q.text('Label', 80),
    capacitance: q.capacitance('Capacitance'),
    tolerance: q.fraction('Capacitance tolerance'),
    fitted: z.boolean().describe('Whether this total is connected now'),
    voltageLimit: q.voltage('Voltage limit').nullable(),
    currentLimit: q.current('Current limit').nullable(),
    reactivePowerLimit: q.reactivePower('Reactive power limit').nullable(),
  })
  .describe('A selectable total');

export const bankSchema = z
  .discriminatedUnion('kind', [
    z.object({
      kind: z.literal('groups'),
      groups: z.array(bankGroupSchema).min(1, 'A bank has at least one group.').max(12),
    }),
    z.object({
      kind: z.literal('totals'),
      totals: z.array(bankTotalSchema).min(1, 'A bank has at least one total.').max(64),
    }),
  ])
  .describe('Capacitor bank');

export const coolingSupplySchema = z
  .object({
    inletTemperatureC: q.number('Inlet temperature', '°C', { min: 0, max: 95 }).nullable(),
    supplyPressure: q.pressure('Supply pressure').nullable(),
    returnPressure: q.pressure('Return pressure').nullable(),
    flow: q.flow('Flow', 'Flow available to the coil, where known instead of the pressures').nullable(),
    outletLimitC: q.number('Outlet limit', '°C', { min: 0, max: 100 }).nullable(),
    interlockFlow: q.flow('Interlock flow', 'Smallest flow at which the machine runs').nullable(),
  })
  .describe('Cooling water');

export const coilConnectionSchema = z
  .object({
    kind: z.enum(['plate', 'blade', 'quick-change', 'custom']),
    centreDistance: q.lengthOrZero('Centre distance').nullable(),
    contactWidth: q.lengthOrZero('Contact width').nullable(),
    contactHeight: q.lengthOrZero('Contact height').nullable(),
    waterPorts: q.text('Water ports', 200),
    note: q.text('Note', 1000),
  })
  .describe('How a coil is fastened to the machine');

export const machineSchema = z
  .object({
    name: q.text('Name', 120),
    supply: supplySchema,
    tank: tankKindSchema,
    transformer: transformerSchema.nullable(),
    fixed: fixedCircuitSchema,
    bank: bankSchema,
    water: coolingSupplySchema,
    connection: coilConnectionSchema.nullable(),
  })
  .describe(
    'A machine: supply, tank, transformer, bank, water and coil connection',
  ) satisfies z.ZodType<Machine>;
