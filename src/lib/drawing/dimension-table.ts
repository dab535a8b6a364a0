/** The drawing in words: every drawn measure once more as a row, for readers who cannot see the lines. */
import type { Coil, CoilShape, Handing, LeadExit } from '../induction/check/types.ts';
import {
  lengthText,
  millimetres,
  type DrawnLeads,
  type DrawnPart,
  type DrawnTube,
  type DrawnWinding,
  type Lettering,
} from './measures.ts';
import type { DimensionRow } from './model.ts';

export const shapeNames: Record<CoilShape, string> = {
  helix: 'cylindrical helix',
  conical: 'conical helix',
  stepped: 'stepped helix',
  pancake: 'pancake',
  'single-turn': 'single turn',
  bore: 'bore coil',
  racetrack: 'racetrack helix',
  'rectangular-helix': 'rectangular helix',
  hairpin: 'hairpin',
  channel: 'channel',
  drawing: 'coil by drawing',
};

const exitNames: Record<LeadExit, string> = {
  axial: 'along the axis',
  radial: 'away from the axis',
  tangential: 'as a tangent',
};

export function tubeText(tube: DrawnTube, lettering: Lettering): string {
  const size =
    tube.kind === 'round'
      ? `round, ${lengthText(tube.width, lettering)}`
      : tube.width === tube.height
        ? `square, ${lengthText(tube.width, lettering)}`
        : `rectangular, ${lengthText(tube.width, lettering)} along the axis by ${lengthText(tube.height, lettering)}`;
  return tube.wall > 0 ? `${size}, wall ${lengthText(tube.wall, lettering)}` : `${size}, wall not given`;
}

interface TableInput {
  coil: Coil;
  winding: DrawnWinding | null;
  tube: DrawnTube;
  part: DrawnPart | null;
  leads: DrawnLeads;
  lettering: Lettering;
}

function windingRows({ coil, winding, tube, part, lettering }: TableInput): DimensionRow[] {
  const rows: DimensionRow[] = [];
  const given = coil.winding;
  const length = (name: string, mm: number | null) => {
    if (mm !== null && mm > 0)
      rows.push({ name, text: lengthText(mm, lettering), value: mm / 1000, unit: 'm' });
  };
  if (given.shape === 'racetrack' || given.shape === 'rectangular-helix' || given.shape === 'channel') {
    length('Opening, length', millimetres(given.insideLength));
    length('Opening, width', millimetres(given.insideWidth));
    if (given.shape === 'rectangular-helix') length('Inside corner radius', millimetres(given.cornerRadius));
    if (given.shape === 'channel') length('Height of the raised crossing', millimetres(given.crossingHeight));
  } else if (given.shape === 'hairpin') {
    length('Length of the legs', millimetres(given.length));
    length('Clear distance between the legs', millimetres(given.legGap));
  } else if (winding) {
    const half = tube.height / 2;
    const [first, last] = [winding.radiusAt(0.5), winding.radiusAt(Math.max(0.5, winding.turns - 0.5))];
    if (given.shape !== 'bore') length('Opening, first turn', 2 * (first - half));
    if (Math.abs(first - last) > 0.05 && given.shape !== 'pancake')
      length('Opening, last turn', 2 * (last - half));
    length('Diameter over the copper', 2 * (Math.max(first, last) + half));
    if (part && given.shape !== 'pancake') {
      length(
        'Gap to the part, radial',
        given.shape === 'bore' ? part.inside / 2 - first - half : first - half - part.outside / 2,
      );
    }
  }
  if (given.shape === 'pancake') length('Gap to the face of the part', millimetres(given.faceGap));
  if ('pitch' in given) length('Pitch', millimetres(given.pitch));
  if (winding && !winding.turnsAssumed && winding.turns > 1 && given.shape !== 'pancake') {
    length('Length over the copper', (winding.turns - 1) * winding.pitch + tube.width);
  }
  return rows;
}

function handingRows(handing: Handing, lettering: Lettering): DimensionRow[] {
  const rows: DimensionRow[] = [];
  const word = (name: string, text: string | null) =>
    rows.push({ name, text: text ?? 'not given yet', value: null, unit: '1' });
  word('Winding direction', handing.windingDirection === null ? null : `${handing.windingDirection}-handed`);
  word('Leads leave', handing.leadExit === null ? null : exitNames[handing.leadExit]);
  if (handing.leadAngleDeg !== null && Number.isFinite(handing.leadAngleDeg)) {
    rows.push({
      name: 'Angle between the leads',
      text: `${handing.leadAngleDeg}°`,
      value: handing.leadAngleDeg,
      unit: 'deg',
    });
  }
  const first = millimetres(handing.firstTurnFromFace);
  if (first)
    rows.push({
      name: 'First turn from the contact face',
      text: lengthText(first, lettering),
      value: first / 1000,
      unit: 'm',
    });
  return rows;
}

export function dimensionTable(input: TableInput): DimensionRow[] {
  const { coil, winding, tube, part, leads, lettering } = input;
  const turns = 'turns' in coil.winding ? coil.winding.turns : winding?.turns;
  const sound = typeof turns === 'number' && Number.isFinite(turns) && turns > 0 ? turns : null;
  const rows: DimensionRow[] = [
    { name: 'Shape', text: shapeNames[coil.winding.shape], value: null, unit: '1' },
    { name: 'Turns', text: sound === null ? 'open' : String(sound), value: sound, unit: '1' },
    ...windingRows(input),
    { name: 'Tube', text: tubeText(tube, lettering), value: null, unit: '1' },
  ];
  if (leads.given) {
    rows.push(
      {
        name: 'Length of each lead',
        text: lengthText(leads.length, lettering),
        value: leads.length / 1000,
        unit: 'm',
      },
      {
        name: 'Leads, centre to centre',
        text: lengthText(leads.spacing, lettering),
        value: leads.spacing / 1000,
        unit: 'm',
      },
    );
  }
  rows.push(...handingRows(coil.handing, lettering));
  rows.push({ name: 'Centre tap', text: coil.centreTap ? 'yes' : 'no', value: null, unit: '1' });
  if (part) {
    const add = (name: string, mm: number | null) => {
      if (mm) rows.push({ name, text: lengthText(mm, lettering), value: mm / 1000, unit: 'm' });
    };
    add('Part, outside diameter', part.outside);
    add('Part, inside diameter', part.inside);
    add('Part, length', part.length);
    add('Part, heated length', part.heated);
    if (part.offset !== 0) {
      rows.push({
        name: 'Part, off the coil’s middle',
        text: lengthText(part.offset, lettering),
        value: part.offset / 1000,
        unit: 'm',
      });
    }
  }
  return rows;
}
