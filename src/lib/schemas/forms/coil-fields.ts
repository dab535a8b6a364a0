/** The fields of the coil, by the paths of the API's coil. */
import {
  choice,
  count,
  flag,
  quantity,
  special,
  text,
  type FieldGroupSpec,
  type Values,
} from './field-spec.ts';

const none = { empty: 'none' } as const;
const shapeOf = (v: Values) => v['coil.winding.shape'] ?? '';
const isShape =
  (...shapes: string[]) =>
  (v: Values) =>
    shapes.includes(shapeOf(v));
const isTube =
  (...kinds: string[]) =>
  (v: Values) =>
    kinds.includes(v['coil.tube.kind'] ?? 'round');
const said = (path: string) => (v: Values) => !['', 'none'].includes(v[path] ?? '');

/** Shapes with a fixed opening or one taken from the part. */
const byClearance = isShape('helix', 'single-turn');

export const windingGroup: FieldGroupSpec = {
  title: 'Winding',
  lead: 'Diameters are to the copper: inside is the clear opening. Pitch is from centre to centre.',
  fields: [
    choice(
      'coil.winding.shape',
      'Shape',
      [
        ['helix', 'Cylindrical helix'],
        ['single-turn', 'Single turn'],
        ['pancake', 'Pancake (flat spiral)'],
        ['conical', 'Conical helix'],
        ['stepped', 'Stepped helix'],
        ['bore', 'Bore coil (inside the part)'],
        ['racetrack', 'Racetrack'],
        ['rectangular-helix', 'Rectangular helix'],
        ['hairpin', 'Hairpin'],
        ['channel', 'Channel'],
        ['drawing', 'Other, by drawing'],
      ],
      { initial: 'helix' },
    ),
    quantity('coil.winding.insideDiameter', 'Inside diameter', 'length', {
      empty: 'proposed',
      when: byClearance,
      hint: 'Or leave it empty and give the clearance.',
    }),
    quantity('coil.winding.clearance', 'Clearance to the part', 'length', {
      empty: 'none',
      when: (v) => byClearance(v) && (v['coil.winding.insideDiameter'] ?? '').trim() === '',
      hint: 'Per side.',
    }),
    quantity('coil.winding.insideDiameter', 'Inside diameter of the first turn', 'length', {
      when: isShape('conical', 'pancake'),
    }),
    quantity('coil.winding.endInsideDiameter', 'Inside diameter of the last turn', 'length', {
      when: isShape('conical'),
    }),
    special('lengths', 'coil.winding.insideDiameters', 'Inside diameter of each turn', {
      empty: 'required',
      when: isShape('stepped'),
      hint: 'One per turn: 48; 48; 52; 56.',
    }),
    quantity('coil.winding.outsideDiameter', 'Outside diameter over the copper', 'length', {
      empty: 'proposed',
      when: isShape('bore'),
      hint: 'Or leave it empty and give the clearance.',
    }),
    quantity('coil.winding.clearance', 'Clearance to the bore', 'length', {
      empty: 'none',
      when: (v) => isShape('bore')(v) && (v['coil.winding.outsideDiameter'] ?? '').trim() === '',
      hint: 'Per side.',
    }),
    quantity('coil.winding.insideLength', 'Clear opening along', 'length', {
      when: isShape('racetrack', 'rectangular-helix', 'channel'),
    }),
    quantity('coil.winding.insideWidth', 'Clear opening across', 'length', {
      when: isShape('racetrack', 'rectangular-helix', 'channel'),
    }),
    quantity('coil.winding.cornerRadius', 'Inside corner radius', 'length', {
      when: isShape('racetrack', 'rectangular-helix'),
    }),
    quantity('coil.winding.crossingHeight', 'Height of the raised crossing', 'length', {
      when: isShape('channel'),
    }),
    quantity('coil.winding.length', 'Length of the legs', 'length', { when: isShape('hairpin') }),
    quantity('coil.winding.legGap', 'Clear distance between the legs', 'length', {
      when: isShape('hairpin'),
    }),
    quantity('coil.winding.turns', 'Turns', 'number', {
      empty: 'proposed',
      when: isShape(
        'helix',
        'conical',
        'pancake',
        'bore',
        'racetrack',
        'rectangular-helix',
        'hairpin',
        'channel',
      ),
      hint: 'Empty = the checker proposes.',
    }),
    quantity('coil.winding.pitch', 'Pitch', 'length', {
      when: isShape(
        'helix',
        'conical',
        'stepped',
        'pancake',
        'bore',
        'racetrack',
        'rectangular-helix',
        'hairpin',
        'channel',
      ),
    }),
    quantity('coil.winding.faceGap', 'Gap to the part’s face', 'length', { when: isShape('pancake') }),
    text('coil.winding.note', 'What the drawing shows', 1000, {
      empty: 'required',
      rows: 3,
      when: isShape('drawing'),
    }),
    quantity('coil.diameterTolerance', 'Tolerance of the opening, ±', 'length', none),
    quantity('coil.pitchTolerance', 'Tolerance of the pitch, ±', 'length', none),
  ],
};

export const tubeGroup: FieldGroupSpec = {
  title: 'Tube',
  fields: [
    choice(
      'coil.tube.kind',
      'Section',
      [
        ['round', 'Round'],
        ['square', 'Square'],
        ['rectangular', 'Rectangular'],
      ],
      { initial: 'round' },
    ),
    quantity('coil.tube.outsideDiameter', 'Tube diameter', 'length', { when: isTube('round') }),
    quantity('coil.tube.side', 'Side', 'length', { when: isTube('square') }),
    quantity('coil.tube.axialWidth', 'Width along the axis', 'length', { when: isTube('rectangular') }),
    quantity('coil.tube.radialHeight', 'Height across the axis', 'length', { when: isTube('rectangular') }),
    quantity('coil.tube.wall', 'Wall', 'length'),
    quantity('coil.tube.cornerRadius', 'Corner radius', 'length', { when: isTube('square', 'rectangular') }),
    choice(
      'coil.copperGrade',
      'Copper grade',
      [
        ['cu-etp', 'Cu-ETP (C11000)'],
        ['cu-of', 'Cu-OF (C10200)'],
        ['cu-dhp', 'Cu-DHP (C12200)'],
      ],
      { initial: 'cu-etp' },
    ),
    quantity('coil.copperTemperatureC', 'Mean copper temperature', 'temperature', {
      empty: 'not-known',
      hint: 'Empty = 40 °C is assumed.',
    }),
    count('coil.waterCircuits', 'Parallel water circuits', { initial: '1' }),
  ],
};

export const leadsGroup: FieldGroupSpec = {
  title: 'Leads and handing',
  lead: 'How the coil sits on the machine. What is missing here blocks posting: a coil of the wrong hand cannot be mounted.',
  fields: [
    quantity('coil.leads.length', 'Length of each lead', 'length', {
      empty: 'not-known',
      hint: 'From the last turn to the contact face.',
    }),
    quantity('coil.leads.spacing', 'Lead spacing', 'length', {
      empty: 'not-known',
      hint: 'From centre to centre.',
    }),
    choice(
      'coil.handing.windingDirection',
      'Winding direction',
      [
        ['right', 'Right-hand'],
        ['left', 'Left-hand'],
      ],
      none,
    ),
    choice(
      'coil.handing.leadExit',
      'Leads leave',
      [
        ['axial', 'Along the axis'],
        ['radial', 'Radially'],
        ['tangential', 'Tangentially'],
      ],
      none,
    ),
    quantity('coil.handing.leadAngleDeg', 'Angle between the leads', 'angle', {
      ...none,
      hint: 'Seen along the axis.',
    }),
    choice(
      'coil.handing.upEnd',
      'Which end is up',
      [
        ['lead-end', 'The end with the leads'],
        ['far-end', 'The far end'],
        ['horizontal', 'Neither: the axis lies level'],
      ],
      none,
    ),
    quantity('coil.handing.firstTurnFromFace', 'First turn from the contact face', 'length', {
      ...none,
      hint: 'To the centre of the first turn.',
    }),
  ],
};

export const supportGroup: FieldGroupSpec = {
  title: 'Support and insulation',
  fields: [
    choice(
      'coil.support.kind',
      'Support of the turns',
      [
        ['none', 'None'],
        ['studs', 'Studs'],
        ['boards', 'Boards'],
        ['potting', 'Potting'],
      ],
      { initial: 'none' },
    ),
    count('coil.support.count', 'How many', {
      empty: 'required',
      when: (v) => ['studs', 'boards'].includes(v['coil.support.kind'] ?? ''),
    }),
    choice(
      'coil.insulation.kind',
      'Insulation or coating',
      [
        ['none', 'None'],
        ['sleeve', 'Sleeve'],
        ['enamel', 'Enamel'],
        ['ceramic', 'Ceramic'],
        ['tape', 'Tape'],
      ],
      { initial: 'none' },
    ),
    quantity('coil.insulation.thickness', 'Its thickness', 'length', { when: said('coil.insulation.kind') }),
    flag('coil.centreTap', 'The middle of the winding is brought out (centre tap)'),
  ],
};

export const coilGroups: readonly FieldGroupSpec[] = [windingGroup, tubeGroup, leadsGroup, supportGroup];
