import { materialOf } from '../../materials/material-of.ts';
import { InductionInputError } from '../../input-error.ts';
import { referenceLevel } from '../../surroundings/reference-levels.ts';
import { spherePower, steadyRise } from '../../surroundings/metal-part.ts';
import type { CheckContext, Rule } from '../context.ts';
import type { FixtureMetalPart } from '../types.ts';
import { commonPractice, finding, quantity } from './finding.ts';

interface HeatedMetal {
  metal: FixtureMetalPart;
  index: number;
  density: number;
  power: number;
  temperatureC: number;
}

/** Power in each metal part of the fixture, from the flux density at its place. */
export function heatedMetal(context: CheckContext): HeatedMetal[] {
  const { surroundings, tank } = context;
  if (!surroundings || !tank) return [];
  return context.requirement.fixture.metalParts.flatMap((metal, index) => {
    const density = surroundings.points[index]?.fluxDensity.value;
    const material = safely(metal);
    if (density === undefined || !material || !material.conducts) return [];
    const mu = material.magnetisation ? 40 : 1;
    const power = spherePower(
      density,
      metal.size,
      tank.operatingFrequency.value,
      material.resistivity(60),
      mu,
    );
    return [{ metal, index, density, power, temperatureC: 25 + steadyRise(power, metal.size) }];
  });
}

function safely(metal: FixtureMetalPart) {
  try {
    return materialOf(metal.material);
  } catch (error) {
    if (error instanceof InductionInputError) return null;
    throw error;
  }
}

/** metal-in-field: a fixture part that takes noticeable power. */
export const metalInField: Rule = (context) =>
  heatedMetal(context)
    .filter(({ power }) => power > 5)
    .map(({ metal, index, density, power }) =>
      finding({
        code: 'metal-in-field',
        severity: 'caution',
        subject: `fixture.metalParts.${index}`,
        figure: quantity(power, 'W'),
        limit: quantity(5, 'W'),
        template: `“${metal.name || 'Metal part'}” stands in {density} and takes about {figure} (estimate).`,
        values: { density: quantity(density, 'T') },
        remedy: 'Move it away, split it so that no ring closes, cool it, or make it of a non-conductor.',
        source: 'conducting sphere in a uniform field; an estimate',
      }),
    );

/** fixture-overheats: its steady temperature in still air. */
export const fixtureOverheats: Rule = (context) => {
  const limit = Math.max(150, context.requirement.fixture.contactTemperatureC ?? 0);
  return heatedMetal(context)
    .filter(({ temperatureC }) => temperatureC > limit)
    .map(({ metal, index, temperatureC }) =>
      finding({
        code: 'fixture-overheats',
        severity: 'caution',
        safety: true,
        subject: `fixture.metalParts.${index}.size`,
        figure: quantity(Math.min(temperatureC, 1500), 'C'),
        limit: quantity(limit, 'C'),
        template: `“${metal.name || 'Metal part'}” would come to about {figure} if the coil ran continuously; {limit} is taken as the limit.`,
        remedy: 'Move it away, cool it, or run with pauses; guard hot parts.',
        source: `${commonPractice}: 15 W/(m²·K) in still air; an estimate`,
      }),
    );
};

/** field-at-operator: flux density above the reference levels where a person stands. */
export const fieldAtOperator: Rule = (context) => {
  const { surroundings, tank } = context;
  const distance = context.requirement.fixture.operatorDistance;
  const point = surroundings?.points.find((one) => one.name === 'place of the person');
  if (!surroundings || !tank || !point || distance === null) return [];
  const f = tank.operatingFrequency.value;
  const worker = referenceLevel(f, 'occupational');
  const everyone = referenceLevel(f, 'public');
  const value = point.fluxDensity.value;
  if (value <= everyone.fluxDensity) return [];
  const above = value > worker.fluxDensity;
  const level = above ? worker : everyone;
  return [
    finding({
      code: 'field-at-operator',
      severity: above ? 'caution' : 'note',
      safety: true,
      subject: 'fixture.operatorDistance',
      figure: quantity(value, 'T'),
      limit: quantity(level.fluxDensity, 'T'),
      template: `At {distance:m} from the coil the field is {figure} at the largest current without shielding, above the reference level of {limit} (${level.name}). Keep {keep:m} away. Implants: keep out.`,
      values: { distance: quantity(distance, 'm'), keep: quantity(surroundings.keepOutDistance.value, 'm') },
      remedy:
        'Stand further off, shield the coil, interlock the place, and have the exposure assessed under local law.',
      source: level.name,
    }),
  ];
};
