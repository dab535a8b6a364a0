import type { Coil, Winding, Workpiece } from '../check/types.ts';
import { InductionInputError, requireWithin } from '../input-error.ts';
import { LARGEST_LENGTH, SMALLEST_LENGTH, sectionOf, type Section } from './section.ts';

/** One turn as a ring: centre radius and axial place of its section, m. */
export interface Ring {
  radius: number;
  z: number;
}

/**
 * An axisymmetric coil as rings in series, z = 0 at its middle. `turns` may be fractional: then the
 * rings are `Math.round(turns)` in the same envelope and results scale by `turns / rings.length`
 * (inductance and part's resistance with its square).
 */
export interface RingCoil {
  rings: Ring[];
  section: Section;
  turns: number;
  /** Centre-to-centre distance of neighbouring turns as entered (tube size for a single turn), m. */
  pitch: number;
}

/** A part about the coil's axis, m; `innerRadius` 0 = solid. `low`/`high` are the ends in z. */
export interface PartBody {
  outerRadius: number;
  innerRadius: number;
  low: number;
  high: number;
}

/** Most turns the field solution takes. */
export const MOST_TURNS = 200;

/** Smallest clearance between copper surfaces, as a share of the tube size, that counts as apart. */
export const TOUCHING_SHARE = 0.03;

/** Whether a shape is solved as rings about one axis (the others are true 3-D paths, without the part). */
export function isAxisymmetric(winding: Winding): boolean {
  switch (winding.shape) {
    case 'helix':
    case 'conical':
    case 'stepped':
    case 'pancake':
    case 'single-turn':
    case 'bore':
      return true;
    default:
      return false;
  }
}

/** Turns as entered, checked: a number from 0.5 to 200. */
export function turnsOf(turns: number | null): number {
  if (turns === null) {
    throw new InductionInputError('turns-open', 'coil.winding.turns', 'The number of turns is open.');
  }
  requireWithin(turns, 0.5, MOST_TURNS, 'coil.winding.turns', 'Turns');
  return turns;
}

function length(value: number, field: string, name: string): number {
  requireWithin(value, SMALLEST_LENGTH, LARGEST_LENGTH, field, name);
  return value;
}

function openSize(field: string, what: string): never {
  throw new InductionInputError('size-open', field, `${what} is open and cannot be taken from the part.`);
}

function checkedClearance(value: number | null): number {
  if (value === null) openSize('coil.winding.clearance', 'The clearance');
  requireWithin(value, 0, 1, 'coil.winding.clearance', 'Clearance');
  return value;
}

/** Inside (clear) diameter of a coil around a part, m. */
function insideDiameterOf(
  w: { insideDiameter: number | null; clearance: number | null },
  part: Workpiece | null,
) {
  if (w.insideDiameter !== null)
    return length(w.insideDiameter, 'coil.winding.insideDiameter', 'Inside diameter');
  if (part === null) openSize('coil.winding.insideDiameter', 'The inside diameter');
  const outside = length(part.outsideDiameter, 'part.outsideDiameter', 'Part outside diameter');
  return outside + 2 * checkedClearance(w.clearance);
}

function stack(count: number, pitch: number, radius: (index: number) => number): Ring[] {
  return Array.from({ length: count }, (_, i) => ({ radius: radius(i), z: (i - (count - 1) / 2) * pitch }));
}

/** Rings at the entered pitch, or for a fractional number of turns in the same envelope. */
function evenStack(turns: number, pitch: number, radius: number): Ring[] {
  const count = Math.max(1, Math.round(turns));
  return stack(count, count === 1 ? pitch : (pitch * turns) / count, () => radius);
}

/**
 * The rings of an axisymmetric winding (helix, conical, stepped, pancake, single turn, bore).
 *
 * Diameters are to the copper surface, pitches centre to centre. Open sizes are taken from the part and
 * the clearance. Throws InductionInputError: `turns-open`, `size-open`, `turns-overlap` (less than 3 % of
 * the tube between surfaces), `outside-method` for other shapes, and field errors.
 * Example: helix ID 52 mm, tube 8 mm, 5 turns, pitch 10 mm → radii 30 mm at z = −20, −10, 0, 10, 20 mm.
 */
export function ringCoil(coil: Coil, part: Workpiece | null): RingCoil {
  const section = sectionOf(coil.tube);
  const w = coil.winding;
  const tall = section.halfRadial;
  let rings: Ring[];
  let turns: number;
  let pitch: number;
  switch (w.shape) {
    case 'helix': {
      turns = turnsOf(w.turns);
      pitch = length(w.pitch, 'coil.winding.pitch', 'Pitch');
      rings = evenStack(turns, pitch, insideDiameterOf(w, part) / 2 + tall);
      break;
    }
    case 'bore': {
      turns = turnsOf(w.turns);
      pitch = length(w.pitch, 'coil.winding.pitch', 'Pitch');
      let outside = w.outsideDiameter;
      if (outside === null) {
        if (part === null) openSize('coil.winding.outsideDiameter', 'The outside diameter');
        outside =
          length(part.insideDiameter, 'part.insideDiameter', 'Part bore') - 2 * checkedClearance(w.clearance);
      }
      length(outside, 'coil.winding.outsideDiameter', 'Outside diameter');
      rings = evenStack(turns, pitch, outside / 2 - tall);
      break;
    }
    case 'conical': {
      turns = Math.round(turnsOf(w.turns));
      pitch = length(w.pitch, 'coil.winding.pitch', 'Pitch');
      const first = length(w.insideDiameter, 'coil.winding.insideDiameter', 'Inside diameter') / 2 + tall;
      const last =
        length(w.endInsideDiameter, 'coil.winding.endInsideDiameter', 'End inside diameter') / 2 + tall;
      const steps = Math.max(1, turns - 1);
      rings = stack(Math.max(1, turns), pitch, (i) => first + ((last - first) * i) / steps);
      break;
    }
    case 'stepped': {
      const diameters = w.insideDiameters;
      requireWithin(diameters.length, 1, MOST_TURNS, 'coil.winding.insideDiameters', 'Number of turns');
      turns = diameters.length;
      pitch = length(w.pitch, 'coil.winding.pitch', 'Pitch');
      const radii = diameters.map(
        (d) => length(d, 'coil.winding.insideDiameters', 'Inside diameter') / 2 + tall,
      );
      rings = stack(turns, pitch, (i) => radii[i] ?? Number.NaN);
      break;
    }
    case 'pancake': {
      turns = Math.max(1, Math.round(turnsOf(w.turns)));
      pitch = length(w.pitch, 'coil.winding.pitch', 'Pitch');
      const first = length(w.insideDiameter, 'coil.winding.insideDiameter', 'Inside diameter') / 2 + tall;
      rings = Array.from({ length: turns }, (_, i) => ({ radius: first + i * pitch, z: 0 }));
      break;
    }
    case 'single-turn': {
      turns = 1;
      pitch = 2 * section.halfAxial;
      rings = [{ radius: insideDiameterOf(w, part) / 2 + tall, z: 0 }];
      break;
    }
    default:
      throw new InductionInputError(
        'outside-method',
        'coil.winding.shape',
        `A ${w.shape} coil is not round about one axis: only its bare figures can be computed.`,
      );
  }
  checkRings(rings, section);
  return { rings, section, turns, pitch };
}

/** Distance between the surfaces of two sections (0 when they touch or overlap), m. */
export function surfaceGap(a: Ring, b: Ring, section: Section): number {
  const dr = Math.abs(a.radius - b.radius);
  const dz = Math.abs(a.z - b.z);
  if (section.kind === 'round') return Math.max(0, Math.hypot(dr, dz) - 2 * section.radius);
  return Math.hypot(Math.max(0, dr - 2 * section.halfRadial), Math.max(0, dz - 2 * section.halfAxial));
}

function checkRings(rings: Ring[], section: Section): void {
  const size = 2 * Math.min(section.halfAxial, section.halfRadial);
  for (const [i, ring] of rings.entries()) {
    if (ring.radius < section.halfRadial * 1.02) {
      throw new InductionInputError(
        'section-impossible',
        'coil.winding.insideDiameter',
        'The tube does not leave an opening on the axis: the coil diameter is too small for it.',
      );
    }
    for (let j = i + 1; j < rings.length; j++) {
      const other = rings[j];
      if (other !== undefined && surfaceGap(ring, other, section) < TOUCHING_SHARE * size) {
        throw new InductionInputError(
          'turns-overlap',
          'coil.winding.pitch',
          `Turns ${i + 1} and ${j + 1} touch: the gap between them is below ${TOUCHING_SHARE * 100} % of the tube.`,
        );
      }
    }
  }
}

/** Gap between a ring's section and a part's section (0 when they touch or overlap), m. */
export function partGap(ring: Ring, section: Section, body: PartBody): number {
  const nearestR = Math.min(body.outerRadius, Math.max(body.innerRadius, ring.radius));
  const nearestZ = Math.min(body.high, Math.max(body.low, ring.z));
  if (section.kind === 'round') {
    return Math.max(0, Math.hypot(nearestR - ring.radius, nearestZ - ring.z) - section.radius);
  }
  const dr = Math.abs(nearestR - ring.radius) - section.halfRadial;
  const dz = Math.abs(nearestZ - ring.z) - section.halfAxial;
  return Math.hypot(Math.max(0, dr), Math.max(0, dz));
}

/**
 * The part in the coil's frame. Under a pancake the face gap places the part (its near face that far
 * from the tube surface, on the +z side) and `axialOffset` is not used; elsewhere `axialOffset` is the
 * place of its middle.
 *
 * @throws InductionInputError `part-overlaps-coil` when copper and part are closer than 3 % of the tube
 */
export function partBody(part: Workpiece, coil: Coil, rings: RingCoil): PartBody {
  const outerRadius = length(part.outsideDiameter, 'part.outsideDiameter', 'Part outside diameter') / 2;
  const extent = length(part.length, 'part.length', 'Part length');
  requireWithin(part.insideDiameter, 0, LARGEST_LENGTH, 'part.insideDiameter', 'Part inside diameter');
  requireWithin(part.axialOffset, -LARGEST_LENGTH, LARGEST_LENGTH, 'part.axialOffset', 'Axial offset');
  const hollow = part.form === 'tube' || part.form === 'ring' || part.insideDiameter > 0;
  const innerRadius = hollow ? part.insideDiameter / 2 : 0;
  if (innerRadius > 0 && outerRadius - innerRadius < Math.max(SMALLEST_LENGTH, 1e-3 * outerRadius)) {
    throw new InductionInputError(
      'out-of-range',
      'part.insideDiameter',
      'The part has no wall: its inside diameter must be clearly smaller than its outside diameter.',
    );
  }
  let middle = part.axialOffset;
  if (coil.winding.shape === 'pancake') {
    requireWithin(coil.winding.faceGap, 0, LARGEST_LENGTH, 'coil.winding.faceGap', 'Face gap');
    middle = rings.section.halfAxial + coil.winding.faceGap + extent / 2;
  }
  const body = { outerRadius, innerRadius, low: middle - extent / 2, high: middle + extent / 2 };
  const size = 2 * Math.min(rings.section.halfAxial, rings.section.halfRadial);
  for (const ring of rings.rings) {
    if (partGap(ring, rings.section, body) < TOUCHING_SHARE * size) {
      throw new InductionInputError(
        'part-overlaps-coil',
        'part.outsideDiameter',
        'The part touches or overlaps the copper: there must be a gap between them.',
      );
    }
  }
  return body;
}
