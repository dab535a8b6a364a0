/** Part, material and process as JSON. */
import { z } from 'zod';
import type { MaterialChoice, Process, Workpiece } from '../../induction/check/types.ts';
import * as q from './quantity.ts';

const resistivity = (name: string) => q.number(name, 'Ω·m', { min: 1e-9, max: 1e6 });

export const materialChoiceSchema = z
  .discriminatedUnion('kind', [
    z.object({
      kind: z.literal('library'),
      id: q.text('Material', 80, 'Id of a library material, e.g. steel-c45'),
    }),
    z.object({
      kind: z.literal('own'),
      own: z.object({
        name: q.text('Material name', 120),
        resistivity20: resistivity('Resistivity at 20 °C').nullable(),
        resistivityHot: resistivity('Resistivity at the target temperature').nullable(),
        relativePermeability: q.number(
          'Relative permeability',
          '',
          { min: 1, max: 1e5 },
          'Initial relative permeability; 1 = not magnetic',
        ),
        saturationFluxDensity: q.number('Saturation flux density', 'T', { min: 0.01, max: 3 }).nullable(),
        curieTemperatureC: q.number('Curie temperature', '°C', { min: 21, max: 1500 }).nullable(),
        density: q.number('Density', 'kg/m3', { min: 1, max: 30000 }),
        specificHeat: q.number('Specific heat', 'J/(kg·K)', { min: 1, max: 1e5 }, 'Mean over the process'),
        thermalConductivity: q.number(
          'Thermal conductivity',
          'W/(m·K)',
          { min: 1e-3, max: 5000 },
          'Mean over the process',
        ),
        emissivity: q.fraction('Emissivity').nullable(),
        solidusC: q.temperatureC('Solidus').nullable(),
      }),
    }),
  ])
  .describe(
    'Material of the library, or one with its own values; both resistivities null = does not conduct',
  ) satisfies z.ZodType<MaterialChoice>;

export const workpieceSchema = z
  .object({
    material: materialChoiceSchema,
    form: z.enum(['cylinder', 'tube', 'ring', 'disc', 'drawing']),
    outsideDiameter: q.length('Outside diameter of the part'),
    insideDiameter: q.lengthOrZero('Inside diameter of the part', 'Inside diameter; 0 for solid forms'),
    length: q.length('Length of the part', 'Axial length, or thickness of a disc'),
    diameterTolerance: q.lengthOrZero('Diameter tolerance', '± on the outside diameter').nullable(),
    weighedMass: q.number('Weighed mass', 'kg', { min: 1e-6, max: 1e5 }).nullable(),
    heatedLength: q.length('Heated length', 'Axial length that must get hot; null = all').nullable(),
    depthWanted: q.length('Depth wanted', 'Heated depth below the surface; null = through').nullable(),
    axialOffset: q.place('Axial offset', 'Middle of the part from the middle of the coil'),
    runout: q.lengthOrZero('Runout', 'Radial runout, total indicator reading').nullable(),
    rotation: z.boolean(),
  })
  .describe('Workpiece') satisfies z.ZodType<Workpiece>;

export const processSchema = z
  .object({
    purpose: z.enum([
      'hardening',
      'brazing',
      'shrink-fitting',
      'forging',
      'melting',
      'bonding',
      'annealing',
      'other',
    ]),
    mode: z.enum(['single-shot', 'scan', 'integral-quench']),
    startTemperatureC: q.temperatureC('Start temperature'),
    targetTemperatureC: q.temperatureC('Target temperature'),
    time: q.seconds('Heating time').nullable(),
    partsPerHour: q.number('Parts per hour', '1/h', { min: 1e-3, max: 1e6 }).nullable(),
    atmosphere: z.enum(['air', 'inert', 'reducing', 'vacuum']),
    highestSurfaceTemperatureC: q.temperatureC('Highest surface temperature').nullable(),
    quench: z.enum(['none', 'separate', 'in-coil']),
  })
  .describe('Process') satisfies z.ZodType<Process>;
