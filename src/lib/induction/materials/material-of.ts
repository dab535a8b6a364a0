import type { MaterialChoice, OwnMaterial } from '../check/types.ts';
import { InductionInputError, requireWithin } from '../input-error.ts';
import { libraryMaterials } from './library.ts';
import { constant, enthalpyOf } from './tables.ts';
import type { Material, PropertyRecord } from './types.ts';

/**
 * The material a requirement names.
 *
 * @param choice a library id, or an own material entered by hand
 * @param hotTemperatureC °C for which an own material's hot resistivity was given (the process's target
 *   temperature); between 20 °C and it the resistivity is a straight line, held outside. Default 800.
 * @throws InductionInputError `unknown-material`, or the field of an own value that is impossible
 */
export function materialOf(choice: MaterialChoice, hotTemperatureC = 800): Material {
  if (choice.kind === 'own') return ownMaterial(choice.own, hotTemperatureC);
  const found = libraryMaterials().find((m) => m.id === choice.id);
  if (found === undefined) {
    throw new InductionInputError(
      'unknown-material',
      'part.material.id',
      `There is no material "${choice.id}" in the library.`,
    );
  }
  return found;
}

/** Coil copper: resistivity in Ω·m of a grade at T °C (see the library for source and standing). */
export function copperResistivity(grade: 'cu-etp' | 'cu-of' | 'cu-dhp', temperatureC: number): number {
  return materialOf({ kind: 'library', id: grade }).resistivity(temperatureC);
}

function ownMaterial(own: OwnMaterial, hotTemperatureC: number): Material {
  const field = 'part.material.own';
  const cold = own.resistivity20 ?? own.resistivityHot;
  const hot = own.resistivityHot ?? own.resistivity20;
  if (cold !== null) requireWithin(cold, 1e-9, 1e6, `${field}.resistivity20`, 'Resistivity at 20 °C');
  if (hot !== null) requireWithin(hot, 1e-9, 1e6, `${field}.resistivityHot`, 'Hot resistivity');
  requireWithin(own.relativePermeability, 1, 1e5, `${field}.relativePermeability`, 'Relative permeability');
  requireWithin(own.density, 1, 3e4, `${field}.density`, 'Density');
  requireWithin(own.specificHeat, 1, 1e5, `${field}.specificHeat`, 'Specific heat');
  requireWithin(own.thermalConductivity, 1e-3, 5e3, `${field}.thermalConductivity`, 'Thermal conductivity');
  if (own.emissivity !== null) requireWithin(own.emissivity, 0, 1, `${field}.emissivity`, 'Emissivity');
  if (own.saturationFluxDensity !== null) {
    requireWithin(
      own.saturationFluxDensity,
      0.01,
      3,
      `${field}.saturationFluxDensity`,
      'Saturation flux density',
    );
  }
  if (own.curieTemperatureC !== null) {
    requireWithin(own.curieTemperatureC, 21, 1500, `${field}.curieTemperatureC`, 'Curie temperature');
  }
  const record: PropertyRecord = {
    source: 'Entered by the user.',
    standing: 'own',
    rangeC: [20, hotTemperatureC],
    uncertainty: 0.1,
    beyond: 'Held.',
  };
  const magnetic = own.relativePermeability > 1;
  const span = hotTemperatureC - 20;
  return {
    id: 'own',
    name: own.name,
    family: 'own',
    conducts: cold !== null && hot !== null,
    resistivity:
      cold === null || hot === null
        ? constant(Number.POSITIVE_INFINITY)
        : (t) => {
            const x = span > 0 ? Math.min(1, Math.max(0, (t - 20) / span)) : t > 20 ? 1 : 0;
            return cold + (hot - cold) * x;
          },
    magnetisation: magnetic
      ? {
          initialPermeability: own.relativePermeability,
          // Without a saturation the permeability stays as entered at any field that can occur.
          saturation: own.saturationFluxDensity ?? LINEAR_SATURATION,
          curieC: own.curieTemperatureC ?? NEVER_CURIE,
        }
      : null,
    specificHeat: constant(own.specificHeat),
    enthalpy: enthalpyOf(constant(own.specificHeat)),
    conductivity: constant(own.thermalConductivity),
    density: own.density,
    emissivity: own.emissivity ?? 0.8,
    solidusC: own.solidusC,
    records: {
      resistivity: record,
      magnetisation: record,
      specificHeat: record,
      conductivity: record,
      density: record,
      emissivity:
        own.emissivity === null
          ? {
              ...record,
              source: 'Assumed 0.8 (oxidised metal), from memory.',
              standing: 'memory',
              uncertainty: 0.25,
            }
          : record,
      solidus: record,
    },
  };
}

/** Stands for "never saturates": large enough that μr is constant to 1e-6 at 10 MA/m. */
const LINEAR_SATURATION = 1e8;
/** Stands for "no Curie point in reach", °C. */
const NEVER_CURIE = 1e6;
