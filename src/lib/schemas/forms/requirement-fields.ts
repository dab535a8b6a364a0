/** The fields of part, process, coil, fixture and acceptance, by the paths of the API's requirement. */
import { libraryMaterials } from './materials.ts';
import {
  choice,
  flag,
  plain,
  quantity,
  special,
  text,
  type FieldGroupSpec,
  type Values,
} from './field-spec.ts';

const none = { empty: 'none' } as const;

const ownMaterial = (v: Values) => v['part.material.id'] === 'own';
const hollow = (v: Values) => v['part.form'] === 'tube' || v['part.form'] === 'ring';

export const partGroups: readonly FieldGroupSpec[] = [
  {
    title: 'Workpiece',
    fields: [
      choice('part.material.id', 'Material', [
        ...libraryMaterials,
        ['own', 'Another material, with its own values'],
      ]),
      choice(
        'part.form',
        'Form',
        [
          ['cylinder', 'Solid cylinder'],
          ['tube', 'Tube'],
          ['ring', 'Ring'],
          ['disc', 'Disc'],
          ['drawing', 'Other, by drawing'],
        ],
        { initial: 'cylinder' },
      ),
      quantity('part.outsideDiameter', 'Outside diameter', 'length'),
      quantity('part.insideDiameter', 'Inside diameter', 'length', { when: hollow }),
      quantity('part.length', 'Length', 'length', { hint: 'Along the axis; the thickness of a disc.' }),
      quantity('part.diameterTolerance', 'Tolerance of the diameter, ±', 'length', none),
      quantity('part.weighedMass', 'Weighed mass', 'mass', { ...none, hint: 'Checks the dimensions.' }),
    ],
  },
  {
    title: 'Values of the material',
    lead: 'Means over the process where a value changes with temperature.',
    fields: [
      text('part.material.own.name', 'Name', 120, { empty: 'required', when: ownMaterial }),
      plain('part.material.own.resistivity20', 'Resistivity at 20 °C', 'µΩ·cm', 1e-8, {
        ...none,
        when: ownMaterial,
        hint: 'Leave both empty where it does not conduct.',
      }),
      plain('part.material.own.resistivityHot', 'Resistivity at the target temperature', 'µΩ·cm', 1e-8, {
        ...none,
        when: ownMaterial,
      }),
      plain('part.material.own.relativePermeability', 'Relative permeability', '', 1, {
        when: ownMaterial,
        initial: '1',
        hint: 'Initial; 1 = not magnetic.',
      }),
      plain('part.material.own.saturationFluxDensity', 'Saturation flux density', 'T', 1, {
        ...none,
        when: ownMaterial,
      }),
      quantity('part.material.own.curieTemperatureC', 'Curie temperature', 'temperature', {
        ...none,
        when: ownMaterial,
      }),
      plain('part.material.own.density', 'Density', 'kg/m³', 1, { when: ownMaterial }),
      plain('part.material.own.specificHeat', 'Specific heat', 'J/(kg·K)', 1, { when: ownMaterial }),
      plain('part.material.own.thermalConductivity', 'Thermal conductivity', 'W/(m·K)', 1, {
        when: ownMaterial,
      }),
      plain('part.material.own.emissivity', 'Emissivity', '', 1, { ...none, when: ownMaterial }),
      quantity('part.material.own.solidusC', 'Melting begins at', 'temperature', {
        ...none,
        when: ownMaterial,
      }),
    ],
  },
  {
    title: 'What gets hot',
    fields: [
      quantity('part.heatedLength', 'Heated length', 'length', {
        ...none,
        hint: 'Empty = the whole length.',
      }),
      quantity('part.depthWanted', 'Depth wanted', 'length', {
        ...none,
        hint: 'Below the surface; empty = through.',
      }),
      quantity('part.axialOffset', 'Offset in the coil', 'length', {
        initial: '0',
        hint: 'Middle of the part from the middle of the coil, along the axis.',
      }),
      quantity('part.runout', 'Runout', 'length', {
        ...none,
        hint: 'Total indicator reading while turning.',
      }),
      flag('part.rotation', 'The part turns while it is heated'),
    ],
  },
];

export const processGroups: readonly FieldGroupSpec[] = [
  {
    title: 'Process',
    fields: [
      choice('process.purpose', 'Purpose', [
        ['hardening', 'Hardening'],
        ['brazing', 'Brazing'],
        ['shrink-fitting', 'Shrink fitting'],
        ['forging', 'Forging'],
        ['melting', 'Melting'],
        ['bonding', 'Bonding'],
        ['annealing', 'Annealing'],
        ['other', 'Other'],
      ]),
      choice(
        'process.mode',
        'Kind',
        [
          ['single-shot', 'Single shot'],
          ['scan', 'Scan (described only: outside the method)'],
          ['integral-quench', 'Integral quench (described only: outside the method)'],
        ],
        { initial: 'single-shot' },
      ),
      quantity('process.startTemperatureC', 'Start temperature', 'temperature', { initial: '20 °C' }),
      quantity('process.targetTemperatureC', 'Target temperature', 'temperature'),
      quantity('process.time', 'Heating time', 'time', {
        ...none,
        hint: 'Or parts per hour; empty = as fast as the machine can.',
      }),
      plain('process.partsPerHour', 'Parts per hour', '1/h', 1, none),
      quantity('process.highestSurfaceTemperatureC', 'Highest surface temperature', 'temperature', none),
      choice(
        'process.atmosphere',
        'Atmosphere',
        [
          ['air', 'Air'],
          ['inert', 'Inert'],
          ['reducing', 'Reducing'],
          ['vacuum', 'Vacuum'],
        ],
        { initial: 'air' },
      ),
      choice(
        'process.quench',
        'Quench',
        [
          ['none', 'None'],
          ['separate', 'Separate'],
          ['in-coil', 'In the coil'],
        ],
        { initial: 'none' },
      ),
    ],
  },
];

export const fixtureGroups: readonly FieldGroupSpec[] = [
  {
    title: 'Fixture',
    lead: 'What holds the part in the coil, and what metal stands near.',
    fields: [
      choice(
        'fixture.kind',
        'Kind',
        [
          ['none', 'No fixture asked for'],
          ['nest', 'Nest'],
          ['support', 'Support'],
          ['rotating-centre', 'Rotating centres'],
          ['other', 'Other'],
        ],
        { initial: 'none' },
      ),
      text('fixture.material', 'Material', 200, { when: hasFixture }),
      text('fixture.datum', 'Datum on the part', 500, { when: hasFixture }),
      text('fixture.contact', 'What touches the part', 500, { when: hasFixture }),
      quantity('fixture.contactTemperatureC', 'How hot the contact gets', 'temperature', {
        ...none,
        when: hasFixture,
      }),
      quantity('fixture.operatorDistance', 'Distance of a person from the coil', 'distance', {
        ...none,
        hint: 'From the middle of the coil to where someone stands.',
      }),
      special('lines', 'fixture.acceptance', 'Acceptance of the fixture', {
        when: hasFixture,
        hint: 'One line each.',
      }),
    ],
  },
];

function hasFixture(v: Values): boolean {
  return (v['fixture.kind'] ?? 'none') !== 'none';
}

export const mostMetalParts = 6;

/** Metal parts near the coil, one group each. */
export function metalPartGroups(values: Values): FieldGroupSpec[] {
  const rows = Math.min(Math.max(Number(values['fixture.metalParts.rows'] ?? '0') || 0, 0), mostMetalParts);
  return Array.from({ length: rows }, (_, index) => {
    const at = (name: string) => `fixture.metalParts.${index}.${name}`;
    return {
      title: `Metal part ${index + 1}`,
      fields: [
        text(at('name'), 'What it is', 120, { empty: 'required' as const }),
        choice(at('material.id'), 'Its material', libraryMaterials),
        quantity(at('r'), 'Distance from the axis', 'length'),
        quantity(at('z'), 'Along the axis from the coil’s middle', 'length'),
        quantity(at('size'), 'Size', 'length', { hint: 'Diameter of a ball of about its bulk.' }),
      ],
    };
  });
}

export const responsibilityGroup: FieldGroupSpec = {
  title: 'Design responsibility',
  fields: [
    choice(
      'designResponsibility',
      'The fabricator builds',
      [
        ['to-drawing', 'to drawing: dimensions rule'],
        ['to-checked-figures', 'to checked figures: the acceptance lines rule'],
        ['to-result', 'to result: a trial on our sample parts rules'],
      ],
      { initial: 'to-checked-figures' },
    ),
  ],
};
