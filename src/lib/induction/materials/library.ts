import { constant, enthalpyOf, interpolated, type OfTemperature } from './tables.ts';
import {
  carbonSteelConductivity,
  carbonSteelSpecificHeat,
  graphiteResistivity,
  stainless304Resistivity,
  stainlessConductivity,
  stainlessSpecificHeat,
} from './steel-properties.ts';
import type { MagnetisationLaw, Material, MaterialFamily, PropertyRecord } from './types.ts';

/** One property with the record behind it. */
interface Entry<T> {
  value: T;
  record: PropertyRecord;
}

interface Description {
  id: string;
  name: string;
  family: MaterialFamily;
  resistivity: Entry<OfTemperature>;
  magnetisation: Entry<MagnetisationLaw | null>;
  specificHeat: Entry<OfTemperature>;
  conductivity: Entry<OfTemperature>;
  density: Entry<number>;
  emissivity: Entry<number>;
  solidus: Entry<number | null>;
}

const HELD = 'Held at the nearest end of the range.';

const memory = <T>(value: T, uncertainty = 0.1, range: readonly [number, number] = [20, 20]): Entry<T> => ({
  value,
  record: {
    source: 'From memory (general handbook knowledge); replace before quoting as a specification.',
    standing: 'memory',
    rangeC: range,
    uncertainty,
    beyond: HELD,
  },
});

const sourced = <T>(
  value: T,
  source: string,
  range: readonly [number, number],
  uncertainty: number,
  beyond = HELD,
): Entry<T> => ({ value, record: { source, standing: 'sourced', rangeC: range, uncertainty, beyond } });

const notMagnetic = (
  note = 'Not magnetic in the usual sense (relative permeability within 1 % of 1).',
): Entry<null> => ({
  value: null,
  record: { source: note, standing: 'memory', rangeC: [-50, 3000], uncertainty: 0.01, beyond: HELD },
});

const EC3 = 'EN 1993-1-2:2005, 3.4.1 (read in a secondary copy)';
const EC3_STAINLESS = 'EN 1993-1-2:2005, Annex C (read in a secondary copy)';
const COPPER_SHEET = 'Copper fact sheet of copper.org, after IEC 60028 (read in a secondary copy)';
const CINCOTTI = 'Fit after Cincotti et al. 2007 (read in a secondary copy)';

/** µΩ·cm → Ω·m, at [°C, µΩ·cm] points. */
const microOhmCm = (...points: [number, number][]): OfTemperature =>
  interpolated(points.map(([t, r]) => [t, r * 1e-8] as const));

/** Resistivity of a 0.4 % carbon steel: table to 900 °C, above it a slope from memory. */
const carbonSteelResistivity = sourced(
  microOhmCm(
    [20, 15.3],
    [30, 16],
    [200, 29.6],
    [400, 49.3],
    [600, 76.6],
    [760, 104.2],
    [900, 114.6],
    [1200, 123],
  ),
  'Table of a 0.4 % carbon steel (read in a secondary copy of a textbook example)',
  [30, 900],
  0.08,
  'Above 900 °C a straight line to 123 µΩ·cm at 1200 °C, from memory.',
);

const steelHeat = sourced<OfTemperature>(carbonSteelSpecificHeat, EC3, [20, 1200], 0.05);
const steelConductivity = sourced<OfTemperature>(carbonSteelConductivity, EC3, [20, 1200], 0.1);
const steelDensity = sourced(7850, 'EN 1993-1-2:2005, 3.4.1 (read in a secondary copy)', [20, 1200], 0.01);
const copperDensity = sourced(8920, COPPER_SHEET, [20, 20], 0.01);
const copperHeat = sourced<OfTemperature>(constant(386), COPPER_SHEET, [20, 20], 0.03);
const copperSolidus = sourced<number | null>(1083, COPPER_SHEET, [20, 1083], 0.005);

const COPPER_SLOPE = 0.00393;
const copperLaw = (rho20: number): OfTemperature => {
  return (t) => rho20 * (1 + COPPER_SLOPE * (Math.min(1080, Math.max(-60, t)) - 20));
};

const descriptions: Description[] = [
  {
    id: 'steel-c45',
    name: 'Carbon steel C45 / 1045',
    family: 'carbon-steel',
    resistivity: carbonSteelResistivity,
    magnetisation: memory({ initialPermeability: 400, saturation: 1.8, curieC: 760 }, 0.15, [20, 760]),
    specificHeat: steelHeat,
    conductivity: steelConductivity,
    density: steelDensity,
    emissivity: memory(0.8, 0.15, [400, 1200]),
    solidus: memory<number | null>(1420, 0.02),
  },
  {
    id: 'steel-4140',
    name: 'Alloy steel 4140 / 42CrMo4',
    family: 'alloy-steel',
    resistivity: memory(
      microOhmCm([20, 22], [200, 32], [400, 50], [600, 76], [760, 104], [900, 115], [1200, 123]),
      0.1,
      [20, 1200],
    ),
    magnetisation: memory({ initialPermeability: 300, saturation: 1.8, curieC: 750 }, 0.15, [20, 750]),
    specificHeat: {
      value: carbonSteelSpecificHeat,
      record: {
        ...memory(0).record,
        source: 'Taken as carbon steel of EN 1993-1-2; that it holds for 4140 is from memory.',
        rangeC: [20, 1200],
      },
    },
    conductivity: memory(
      interpolated([
        [20, 42.5],
        [400, 38],
        [600, 33],
        [800, 27],
        [1200, 28],
      ]),
      0.1,
      [20, 1200],
    ),
    density: memory(7850, 0.01),
    emissivity: memory(0.8, 0.15, [400, 1200]),
    solidus: memory<number | null>(1415, 0.02),
  },
  {
    id: 'stainless-304',
    name: 'Stainless steel 304 / 1.4301',
    family: 'stainless-steel',
    resistivity: sourced<OfTemperature>(
      stainless304Resistivity,
      CINCOTTI,
      [24, 756],
      0.05,
      'Below held; above 756 °C a slope of 1.6e-10 Ω·m/K from memory.',
    ),
    magnetisation: notMagnetic('Austenitic; cold-worked 304 can be slightly magnetic (from memory).'),
    specificHeat: sourced<OfTemperature>(stainlessSpecificHeat, EC3_STAINLESS, [20, 1200], 0.05),
    conductivity: sourced<OfTemperature>(stainlessConductivity, EC3_STAINLESS, [20, 1200], 0.1),
    density: memory(7930, 0.01),
    emissivity: memory(0.6, 0.3, [200, 1100]),
    solidus: memory<number | null>(1400, 0.02),
  },
  {
    id: 'stainless-316',
    name: 'Stainless steel 316 / 1.4401',
    family: 'stainless-steel',
    resistivity: memory(microOhmCm([20, 74], [800, 118]), 0.08, [20, 800]),
    magnetisation: notMagnetic('Austenitic (from memory).'),
    specificHeat: sourced<OfTemperature>(stainlessSpecificHeat, EC3_STAINLESS, [20, 1200], 0.05),
    conductivity: sourced<OfTemperature>(stainlessConductivity, EC3_STAINLESS, [20, 1200], 0.1),
    density: memory(8000, 0.01),
    emissivity: memory(0.5, 0.4, [200, 1100]),
    solidus: memory<number | null>(1375, 0.02),
  },
  {
    id: 'aluminium-6061',
    name: 'Aluminium 6061-T6',
    family: 'aluminium',
    resistivity: memory(microOhmCm([20, 4.0], [500, 9.5]), 0.1, [20, 500]),
    magnetisation: notMagnetic(),
    specificHeat: memory(constant(896), 0.1),
    conductivity: memory(constant(167), 0.1),
    density: memory(2700, 0.01),
    emissivity: memory(0.15, 0.7, [20, 500]),
    solidus: memory<number | null>(582, 0.02),
  },
  {
    id: 'cu-etp',
    name: 'Copper Cu-ETP (C110)',
    family: 'copper',
    resistivity: sourced(
      copperLaw(1.7241e-8),
      `IEC 60028 annealed copper and its temperature coefficient; ${COPPER_SHEET}`,
      [0, 150],
      0.015,
      'The same straight line, to 1080 °C.',
    ),
    magnetisation: notMagnetic(),
    specificHeat: copperHeat,
    conductivity: sourced<OfTemperature>(constant(394), COPPER_SHEET, [20, 20], 0.03),
    density: copperDensity,
    emissivity: memory(0.3, 0.9, [20, 800]),
    solidus: copperSolidus,
  },
  {
    id: 'cu-of',
    name: 'Copper Cu-OF (C101, C102)',
    family: 'copper',
    resistivity: memory(copperLaw(1.71e-8), 0.02, [0, 150]),
    magnetisation: notMagnetic(),
    specificHeat: copperHeat,
    conductivity: memory(constant(391), 0.05),
    density: copperDensity,
    emissivity: memory(0.3, 0.9, [20, 800]),
    solidus: copperSolidus,
  },
  {
    id: 'cu-dhp',
    name: 'Copper Cu-DHP (C122)',
    family: 'copper',
    resistivity: memory(
      (t: number) => 2.03e-8 + 1.7241e-8 * COPPER_SLOPE * (Math.min(1080, Math.max(-60, t)) - 20),
      0.06,
      [0, 150],
    ),
    magnetisation: notMagnetic(),
    specificHeat: copperHeat,
    conductivity: memory(constant(339), 0.05),
    density: memory(8940, 0.01),
    emissivity: memory(0.3, 0.9, [20, 800]),
    solidus: copperSolidus,
  },
  {
    id: 'brass-c260',
    name: 'Brass C260 (70/30)',
    family: 'brass',
    resistivity: memory(
      (t: number) => 6.2e-8 * (1 + 0.0015 * (Math.min(900, Math.max(-60, t)) - 20)),
      0.08,
      [20, 300],
    ),
    magnetisation: notMagnetic(),
    specificHeat: memory(constant(375), 0.05),
    conductivity: memory(constant(120), 0.05),
    density: memory(8530, 0.01),
    emissivity: memory(0.3, 0.9, [20, 600]),
    solidus: memory<number | null>(915, 0.01),
  },
  {
    id: 'brass-c360',
    name: 'Brass C360 (free cutting)',
    family: 'brass',
    resistivity: memory(
      (t: number) => 6.6e-8 * (1 + 0.0015 * (Math.min(880, Math.max(-60, t)) - 20)),
      0.08,
      [20, 300],
    ),
    magnetisation: notMagnetic(),
    specificHeat: memory(constant(380), 0.05),
    conductivity: memory(constant(115), 0.05),
    density: memory(8500, 0.01),
    emissivity: memory(0.3, 0.9, [20, 600]),
    solidus: memory<number | null>(885, 0.01),
  },
  {
    id: 'titanium-cp2',
    name: 'Titanium, commercially pure grade 2',
    family: 'titanium',
    resistivity: memory(microOhmCm([20, 56], [800, 160]), 0.1, [20, 800]),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 520],
        [800, 680],
      ]),
      0.1,
      [20, 800],
    ),
    conductivity: memory(constant(16.4), 0.15),
    density: memory(4510, 0.01),
    emissivity: memory(0.4, 0.5, [20, 900]),
    solidus: memory<number | null>(1660, 0.01),
  },
  {
    id: 'titanium-6al-4v',
    name: 'Titanium 6Al-4V (grade 5)',
    family: 'titanium',
    resistivity: memory(microOhmCm([20, 171], [800, 188]), 0.1, [20, 800]),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 526],
        [800, 720],
      ]),
      0.1,
      [20, 800],
    ),
    conductivity: memory(
      interpolated([
        [20, 6.7],
        [800, 17],
      ]),
      0.15,
      [20, 800],
    ),
    density: memory(4430, 0.01),
    emissivity: memory(0.4, 0.5, [20, 900]),
    solidus: memory<number | null>(1604, 0.01),
  },
  {
    id: 'inconel-600',
    name: 'Nickel alloy 600',
    family: 'nickel-alloy',
    resistivity: memory(microOhmCm([20, 103], [1000, 115]), 0.06, [20, 1000]),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 444],
        [900, 620],
      ]),
      0.08,
      [20, 900],
    ),
    conductivity: memory(
      interpolated([
        [20, 14.9],
        [800, 28],
      ]),
      0.1,
      [20, 800],
    ),
    density: memory(8470, 0.01),
    emissivity: memory(0.7, 0.3, [20, 1000]),
    solidus: memory<number | null>(1354, 0.01),
  },
  {
    id: 'inconel-718',
    name: 'Nickel alloy 718',
    family: 'nickel-alloy',
    resistivity: memory(microOhmCm([20, 125], [900, 134]), 0.06, [20, 900]),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 435],
        [900, 640],
      ]),
      0.08,
      [20, 900],
    ),
    conductivity: memory(
      interpolated([
        [20, 11.4],
        [800, 25],
      ]),
      0.1,
      [20, 800],
    ),
    density: memory(8190, 0.01),
    emissivity: memory(0.7, 0.3, [20, 1000]),
    solidus: memory<number | null>(1260, 0.01),
  },
  {
    id: 'tungsten-carbide-co',
    name: 'Tungsten carbide, 6 % cobalt',
    family: 'carbide',
    resistivity: memory(microOhmCm([20, 20], [800, 45]), 0.2, [20, 800]),
    magnetisation: notMagnetic(
      'The cobalt binder is weakly magnetic (relative permeability a few, below its Curie point); neglected (from memory).',
    ),
    specificHeat: memory(constant(210), 0.15),
    conductivity: memory(constant(90), 0.15),
    density: memory(14900, 0.02),
    emissivity: memory(0.6, 0.35, [20, 1000]),
    solidus: memory<number | null>(1300, 0.05),
  },
  {
    id: 'graphite',
    name: 'Graphite (grade AT101)',
    family: 'graphite',
    resistivity: sourced<OfTemperature>(
      graphiteResistivity,
      `${CINCOTTI}; one grade, others differ by a factor of two`,
      [19, 1601],
      0.5,
    ),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 710],
        [500, 1450],
        [1000, 1850],
        [2000, 2100],
      ]),
      0.1,
      [20, 2000],
    ),
    conductivity: memory(
      interpolated([
        [20, 110],
        [1000, 55],
        [2000, 40],
      ]),
      0.3,
      [20, 2000],
    ),
    density: memory(1800, 0.06),
    emissivity: memory(0.85, 0.06, [20, 2000]),
    solidus: memory<number | null>(null, 0),
  },
  {
    id: 'molybdenum',
    name: 'Molybdenum',
    family: 'refractory',
    resistivity: memory(microOhmCm([20, 5.3], [1000, 27], [2000, 54]), 0.08, [20, 2000]),
    magnetisation: notMagnetic(),
    specificHeat: memory(
      interpolated([
        [20, 251],
        [1000, 310],
      ]),
      0.08,
      [20, 1000],
    ),
    conductivity: memory(
      interpolated([
        [20, 138],
        [1000, 105],
      ]),
      0.1,
      [20, 1000],
    ),
    density: memory(10200, 0.01),
    emissivity: memory(0.2, 0.5, [20, 1500]),
    solidus: memory<number | null>(2623, 0.01),
  },
];

function build(d: Description): Material {
  return {
    id: d.id,
    name: d.name,
    family: d.family,
    conducts: true,
    resistivity: d.resistivity.value,
    magnetisation: d.magnetisation.value,
    specificHeat: d.specificHeat.value,
    enthalpy: enthalpyOf(d.specificHeat.value),
    conductivity: d.conductivity.value,
    density: d.density.value,
    emissivity: d.emissivity.value,
    solidusC: d.solidus.value,
    records: {
      resistivity: d.resistivity.record,
      magnetisation: d.magnetisation.record,
      specificHeat: d.specificHeat.record,
      conductivity: d.conductivity.record,
      density: d.density.record,
      emissivity: d.emissivity.record,
      solidus: d.solidus.record,
    },
  };
}

/** The materials of the library, in reading order. */
export const materials: readonly Material[] = descriptions.map(build);

/** The materials of the library; every property carries its source and standing. */
export function libraryMaterials(): readonly Material[] {
  return materials;
}
