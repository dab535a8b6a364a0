/** POST /api/v1/checks: a requirement in, the check result out. */
import { z } from 'zod';
import { findingCodes, type CheckResult } from '../../induction/check/types.ts';
import { acceptanceLineSchema, requirementSchema, unitSchema } from './requirement.ts';
import { tankKindSchema } from './machine.ts';

export const solverSettingSchema = z
  .enum(['preview', 'default', 'fine'])
  .describe('How finely the field is solved: preview for typing, default for what is stored');

export const checkRequestSchema = z
  .object({
    requirement: requirementSchema,
    setting: solverSettingSchema.optional(),
  })
  .describe('A requirement to check');
export type CheckRequest = z.infer<typeof checkRequestSchema>;

export const quantitySchema = z.object({ value: z.number(), unit: unitSchema });

export const figureSchema = z
  .object({
    value: z.number(),
    low: z.number(),
    high: z.number(),
    unit: unitSchema,
    method: z.string().describe('Formula or solver that gave it'),
    assumptions: z.array(z.string()),
    contributors: z
      .array(
        z.object({
          name: z.string(),
          variation: quantitySchema,
          effect: z.number().describe('As a fraction of the value'),
        }),
      )
      .describe('At most three, largest first'),
  })
  .describe('A value with its band');

const coilFigures = {
  frequency: z.number(),
  inductance: figureSchema,
  resistance: figureSchema,
  q: figureSchema,
};
export const coilFiguresSchema = z.object(coilFigures);
export const loadedFiguresSchema = z.object({
  ...coilFigures,
  loadResistance: figureSchema,
  efficiency: figureSchema,
  phaseDeg: figureSchema,
});

export const findingSchema = z
  .object({
    code: z.enum(findingCodes),
    severity: z.enum(['blocker', 'caution', 'note']),
    safety: z.boolean(),
    subject: z.string().describe('Path of the field it is about'),
    figure: quantitySchema.nullable(),
    limit: quantitySchema.nullable(),
    margin: z.number().nullable(),
    template: z.string().describe('Sentence with {name} places for the values'),
    values: z.record(z.string(), quantitySchema),
    message: z.string().describe('The sentence in metric units'),
    remedy: z.string(),
    fixes: z.array(
      z.object({
        label: z.string(),
        field: z.string(),
        value: z.union([z.number(), z.string(), z.boolean()]),
      }),
    ),
    source: z.string(),
  })
  .describe('One statement of the checker');

const ladderStateSchema = z.object({
  frequency: figureSchema,
  deliverablePower: figureSchema,
  limitedBy: z.enum(['rated-power', 'voltage', 'current', 'bank', 'coil']),
  powerIntoPart: z.number(),
  coilCurrent: z.number(),
  coilVoltage: z.number(),
  bankCurrent: z.number(),
  bankVoltage: z.number(),
  reactivePower: z.number(),
  unitVoltage: z.number(),
  unitCurrent: z.number(),
  unitReactivePower: z.number(),
  inverterVoltage: z.number(),
  inverterCurrent: z.number(),
  inBand: z.boolean(),
  limits: z.array(
    z.object({ name: z.string(), figure: quantitySchema, limit: quantitySchema, met: z.boolean() }),
  ),
});

export const ladderRowSchema = z
  .object({
    id: z.string(),
    label: z.string(),
    capacitance: z.number(),
    unitsPerGroup: z.array(z.number()),
    tap: z.number().nullable(),
    ratio: z.number(),
    fitted: z.boolean(),
    advised: z.boolean(),
    reason: z.string(),
    cold: ladderStateSchema,
    hot: ladderStateSchema,
    fits: z.boolean(),
  })
  .describe('One bank setting on one tap');

const tankFiguresSchema = z.object({
  kind: tankKindSchema,
  capacitance: z.number(),
  inductance: figureSchema,
  referredTo: z.enum(['coil side', 'primary side']),
  resonanceCold: figureSchema,
  resonanceHot: figureSchema,
  operatingFrequency: figureSchema,
  q: figureSchema,
  characteristicImpedance: figureSchema,
  coilCurrent: figureSchema,
  coilVoltage: figureSchema,
  coilVoltageToTap: figureSchema.nullable(),
  bankCurrent: figureSchema,
  reactivePower: figureSchema,
  deliverablePower: figureSchema,
  bankLoss: figureSchema,
  transformerLoss: figureSchema,
});

export const checkResultSchema = z
  .object({
    methodVersion: z.string(),
    setting: solverSettingSchema,
    resolved: z
      .object({
        turns: z.number(),
        insideDiameter: z.number(),
        outsideDiameter: z.number(),
        length: z.number(),
        pitch: z.number(),
      })
      .nullable(),
    bare: coilFiguresSchema.nullable(),
    bareAtTest: coilFiguresSchema.nullable(),
    cold: loadedFiguresSchema.nullable(),
    hot: loadedFiguresSchema.nullable(),
    leads: z.object({ inductance: figureSchema, resistance: figureSchema, share: z.number() }).nullable(),
    tank: tankFiguresSchema.nullable(),
    chain: z.array(
      z.object({
        name: z.enum(['inverter', 'transformer', 'bank', 'bus', 'leads', 'coil', 'part']),
        power: figureSchema,
        share: z.number(),
      }),
    ),
    skin: z
      .object({
        copper: figureSchema,
        partCold: figureSchema,
        partHot: figureSchema,
        diameterOverDepthCold: z.number(),
        diameterOverDepthHot: z.number(),
      })
      .nullable(),
    heating: z
      .object({
        energy: figureSchema,
        meanPowerNeeded: figureSchema.nullable(),
        timeAtDeliverablePower: figureSchema.nullable(),
        surfaceLoss: figureSchema,
        massHeated: z.number(),
      })
      .nullable(),
    water: z
      .object({
        duty: figureSchema,
        flow: figureSchema,
        velocity: figureSchema,
        reynolds: figureSchema,
        temperatureRise: figureSchema,
        outletTemperature: figureSchema,
        wallTemperature: figureSchema,
        pressureDrop: figureSchema,
        circuitsAdvised: z.number(),
      })
      .nullable(),
    mechanics: z
      .object({
        clearanceBetweenTurns: z.number().nullable(),
        radialClearanceCold: z.number().nullable(),
        radialClearanceHot: z.number().nullable(),
        wallAfterBending: z.number(),
        workingPressureRating: figureSchema,
        testPressure: z.number(),
      })
      .nullable(),
    surroundings: z
      .object({
        keepOutDistance: figureSchema,
        referenceLevel: quantitySchema,
        referenceName: z.string(),
        points: z.array(z.object({ name: z.string(), fluxDensity: figureSchema })),
      })
      .nullable(),
    shop: z
      .object({
        developedLength: figureSchema,
        cutLength: figureSchema,
        copperMass: figureSchema,
        mandrelDiameter: figureSchema.nullable(),
        bendRadiusOverTube: z.number(),
        bends: z.number(),
        brazedJoints: z.number(),
        waterCircuits: z.number(),
        tests: z.array(z.string()),
        connectionParts: z.array(z.string()),
      })
      .nullable(),
    ladder: z.array(ladderRowSchema),
    proposedAcceptance: z.array(acceptanceLineSchema),
    findings: z.array(findingSchema),
    sanity: z.object({ inductance: z.number(), difference: z.number() }).nullable(),
  })
  .describe('Figures, findings and bank ladder of one check') satisfies z.ZodType<CheckResult>;
