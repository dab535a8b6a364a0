import type { Coil, Leads } from '../check/types.ts';
import { InductionInputError, requireWithin } from '../input-error.ts';
import { turnsOf, type RingCoil } from './rings.ts';
import { LARGEST_LENGTH, SMALLEST_LENGTH, sectionOf } from './section.ts';

/** Builds x, y, z triples. */
class Path {
  private readonly points: number[] = [];

  to(x: number, y: number, z: number): this {
    this.points.push(x, y, z);
    return this;
  }

  /** Arc about (cx, cy) with vertices moved out so that the polygon keeps the arc's area. */
  arc(
    cx: number,
    cy: number,
    radius: number,
    from: number,
    to: number,
    chords: number,
    z: number,
    rise = 0,
  ): this {
    const step = (to - from) / chords;
    const vertex = radius * Math.sqrt(Math.abs(step) / Math.sin(Math.abs(step)));
    for (let k = 0; k <= chords; k++) {
      const angle = from + k * step;
      const r = k === 0 || k === chords ? radius : vertex;
      this.to(cx + r * Math.cos(angle), cy + r * Math.sin(angle), z + (rise * k) / chords);
    }
    return this;
  }

  done(): Float64Array {
    return Float64Array.from(this.points);
  }
}

/** Chords per turn of a round winding: 16 (4 per 90°), fewer for very many turns. */
function chordsPerTurn(turns: number): number {
  return Math.max(8, Math.min(16, Math.floor(640 / turns)));
}

/** Distance the end legs stand off the turns, in tube sizes; where the drawing says no other (common practice). */
const LEG_OFFSET = 1.5;

export function checkedLeads(leads: Leads, tubeSize: number): Leads {
  requireWithin(leads.length, 0, 10, 'coil.leads.length', 'Lead length');
  requireWithin(leads.spacing, SMALLEST_LENGTH, 2, 'coil.leads.spacing', 'Lead spacing');
  if (leads.spacing < tubeSize * 1.001) {
    throw new InductionInputError(
      'turns-overlap',
      'coil.leads.spacing',
      'The leads touch: their centre distance must exceed the tube.',
    );
  }
  return leads;
}

/**
 * True wire path of a round coil with its legs and leads, closed by a straight piece across the terminals
 * (where an instrument or the bus would close it). Turns run from z = −Np/2 to +Np/2; legs stand off by
 * 1.5 tube sizes. Leads leave radially (also for tangential exits) or, with an axial exit, at the low end.
 * A bore coil's far end returns through its own middle.
 *
 * @returns polyline, and the straight leg length (without leads)
 */
export function leadedPath(coil: Coil, rings: RingCoil, leads: Leads): { path: Float64Array; legs: number } {
  const tube = 2 * Math.max(rings.section.halfAxial, rings.section.halfRadial);
  checkedLeads(leads, 2 * rings.section.halfAxial);
  const offset = LEG_OFFSET * tube;
  const half = leads.spacing / 2;
  const shape = coil.winding.shape;
  if (rings.rings.length === 1 && shape !== 'pancake') return singleTurn(rings, leads, half);
  if (shape === 'pancake') return pancake(rings, leads, offset);
  const winding = helixPoints(rings);
  const n = winding.length;
  const start = { r: winding[0] as number, z: winding[2] as number };
  const end = { r: winding[n - 3] as number, z: winding[n - 1] as number };
  // The angle of the end point may differ for broken turns; legs are taken in the starting plane's direction.
  const angle = Math.atan2(winding[n - 2] as number, winding[n - 3] as number);
  const endR = Math.hypot(winding[n - 3] as number, winding[n - 2] as number);
  if (shape === 'bore') return boreCoil(winding, start, { r: endR, z: end.z, angle }, leads, offset);
  const out = Math.max(start.r, endR, ...rings.rings.map((ring) => ring.radius)) + offset;
  const path = new Path();
  const axial = coil.handing.leadExit === 'axial';
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  let legs: number;
  if (axial) {
    const low = start.z - offset;
    path.to(start.r, 0, low - leads.length).to(start.r, 0, start.z);
    append(path, winding);
    path.to(out * c, out * s, end.z).to(start.r + leads.spacing, 0, end.z);
    path.to(start.r + leads.spacing, 0, low - leads.length).to(start.r, 0, low - leads.length);
    legs = 2 * offset + Math.abs(end.z - start.z) + Math.abs(out - endR);
  } else {
    const zs = Math.min(half, Math.abs(start.z)) * Math.sign(start.z || -1);
    path
      .to(out + leads.length, 0, zs)
      .to(out, 0, zs)
      .to(out, 0, start.z)
      .to(start.r, 0, start.z);
    append(path, winding);
    path
      .to(out * c, out * s, end.z)
      .to(out, 0, end.z)
      .to(out, 0, -zs);
    path.to(out + leads.length, 0, -zs).to(out + leads.length, 0, zs);
    legs = 2 * offset + Math.abs(end.z - start.z) - 2 * Math.abs(zs);
  }
  return { path: path.done(), legs: Math.max(0, legs) };
}

function append(path: Path, points: Float64Array): void {
  for (let k = 0; k < points.length; k += 3)
    path.to(points[k] as number, points[k + 1] as number, points[k + 2] as number);
}

/** The turns alone, radius and height running evenly from half a pitch before to half a pitch after. */
export function helixPoints(rings: RingCoil): Float64Array {
  const list = rings.rings;
  const turns = rings.turns;
  const chords = Math.max(4, Math.round(chordsPerTurn(turns) * turns));
  const step = (2 * Math.PI * turns) / chords;
  const swell = Math.sqrt(step / Math.sin(step));
  const path = new Path();
  for (let k = 0; k <= chords; k++) {
    // Position along the rings: −0.5 … n − 0.5, straight between ring centres and beyond the ends.
    const x = (k / chords) * list.length - 0.5;
    const low = Math.min(Math.max(0, Math.floor(x)), Math.max(0, list.length - 2));
    const a = list[low] ?? { radius: 0, z: 0 };
    const b = list[low + 1] ?? { radius: a.radius, z: a.z + rings.pitch };
    const r = a.radius + (b.radius - a.radius) * Math.min(Math.max(x - low, 0), 1);
    const z = a.z + (b.z - a.z) * (x - low);
    const angle = k * step;
    const v = k === 0 || k === chords ? r : r * swell;
    path.to(v * Math.cos(angle), v * Math.sin(angle), z);
  }
  return path.done();
}

function singleTurn(rings: RingCoil, leads: Leads, half: number): { path: Float64Array; legs: number } {
  const radius = rings.rings[0]?.radius ?? 0;
  const gap = Math.asin(Math.min(0.9, half / radius));
  const path = new Path();
  const x = radius * Math.cos(gap);
  path.to(x + leads.length, half, 0).to(x, half, 0);
  path.arc(0, 0, radius, gap, 2 * Math.PI - gap, 24, 0);
  path
    .to(x, -half, 0)
    .to(x + leads.length, -half, 0)
    .to(x + leads.length, half, 0);
  return { path: path.done(), legs: 0 };
}

/** Spiral; the inner end drops below the plane and crosses outwards under the turns. */
function pancake(rings: RingCoil, leads: Leads, offset: number): { path: Float64Array; legs: number } {
  const first = rings.rings[0]?.radius ?? 0;
  const last = rings.rings[rings.rings.length - 1]?.radius ?? 0;
  const pitch = rings.rings.length > 1 ? rings.pitch : 0;
  const from = Math.max(0.6 * first, first - pitch / 2);
  const to = last + pitch / 2;
  const chords = Math.max(4, Math.round(chordsPerTurn(rings.turns) * rings.turns));
  const step = (2 * Math.PI * rings.turns) / chords;
  const out = to + offset;
  const depth = -Math.max(offset, leads.spacing);
  const path = new Path();
  path
    .to(out + leads.length, 0, depth)
    .to(from, 0, depth)
    .to(from, 0, 0);
  for (let k = 1; k <= chords; k++) {
    const r = from + ((to - from) * k) / chords;
    const v = r * Math.sqrt(step / Math.sin(step));
    path.to(v * Math.cos(k * step), v * Math.sin(k * step), 0);
  }
  path
    .to(out, 0, 0)
    .to(out, 0, depth + leads.spacing)
    .to(out + leads.length, 0, depth + leads.spacing);
  path.to(out + leads.length, 0, depth);
  return { path: path.done(), legs: out - from + Math.abs(depth) };
}

function boreCoil(
  winding: Float64Array,
  start: { r: number; z: number },
  end: { r: number; z: number; angle: number },
  leads: Leads,
  offset: number,
): { path: Float64Array; legs: number } {
  const inner = Math.max(0, start.r - Math.max(offset, leads.spacing));
  const low = start.z - offset;
  const path = new Path();
  path.to(start.r, 0, low - leads.length).to(start.r, 0, start.z);
  append(path, winding);
  path.to(inner * Math.cos(end.angle), inner * Math.sin(end.angle), end.z);
  path
    .to(inner, 0, end.z)
    .to(inner, 0, low - leads.length)
    .to(start.r, 0, low - leads.length);
  return { path: path.done(), legs: Math.abs(end.z - low) + (end.r - inner) + offset };
}

/** A coil that is not round about one axis: its turns as closed loops, and the size of the equal circle. */
export interface LoopCoil {
  /** One closed polyline per turn, in series. */
  loops: Float64Array[];
  turns: number;
  pitch: number;
  /** Length of one turn's centre line, m. */
  turnLength: number;
  /** Radius of the circular coil with the same area over perimeter: 2A/P, m. */
  equivalentRadius: number;
}

function size(value: number, field: string, name: string): number {
  requireWithin(value, SMALLEST_LENGTH, LARGEST_LENGTH, field, name);
  return value;
}

/**
 * Centre lines of racetrack, rectangular-helix, hairpin and channel coils, as identical closed loops
 * stacked at the pitch.
 *
 * - racetrack and rectangular helix: rounded rectangle about the clear opening;
 * - hairpin: two straight legs with a semicircular far end, closed straight at the feed end;
 * - channel: two long sides whose cross-overs at both ends are raised by the crossing height.
 *
 * @throws InductionInputError for impossible sizes or other shapes
 */
export function loopCoil(coil: Coil): LoopCoil {
  const w = coil.winding;
  const section = sectionOf(coil.tube);
  const h = section.halfRadial;
  switch (w.shape) {
    case 'racetrack':
    case 'rectangular-helix': {
      const a = size(w.insideLength, 'coil.winding.insideLength', 'Inside length') + 2 * h;
      const b = size(w.insideWidth, 'coil.winding.insideWidth', 'Inside width') + 2 * h;
      const inside = w.shape === 'racetrack' ? Math.min(a, b) / 2 - h : w.cornerRadius;
      requireWithin(inside, 0, Math.min(a, b) / 2 - h + 1e-9, 'coil.winding.cornerRadius', 'Corner radius');
      const c = Math.min(inside + h, Math.min(a, b) / 2);
      const area = a * b - (4 - Math.PI) * c * c;
      return stacked(coil, roundedRectangle(a, b, c), area, 2 * (a + b) - (8 - 2 * Math.PI) * c);
    }
    case 'hairpin': {
      const length = size(w.length, 'coil.winding.length', 'Leg length');
      const spacing = size(w.legGap, 'coil.winding.legGap', 'Gap between the legs') + 2 * h;
      const r = spacing / 2;
      const area = length * spacing + (Math.PI * r * r) / 2;
      return stacked(coil, hairpinLoop(length, r), area, 2 * length + Math.PI * r + spacing);
    }
    case 'channel': {
      const a = size(w.insideLength, 'coil.winding.insideLength', 'Inside length') + 2 * h;
      const b = size(w.insideWidth, 'coil.winding.insideWidth', 'Inside width') + 2 * h;
      requireWithin(w.crossingHeight, 0, LARGEST_LENGTH, 'coil.winding.crossingHeight', 'Crossing height');
      return stacked(coil, channelLoop(a, b, w.crossingHeight), a * b, 2 * (a + b) + 4 * w.crossingHeight);
    }
    default:
      throw new InductionInputError('outside-method', 'coil.winding.shape', 'This shape is not computed.');
  }
}

function stacked(coil: Coil, loop: Float64Array, area: number, turnLength: number): LoopCoil {
  const w = coil.winding;
  if (!('turns' in w) || !('pitch' in w)) {
    throw new InductionInputError('outside-method', 'coil.winding.shape', 'This shape is not computed.');
  }
  const turns = turnsOf(w.turns);
  const count = Math.max(1, Math.round(turns));
  const section = sectionOf(coil.tube);
  requireWithin(w.pitch, SMALLEST_LENGTH, LARGEST_LENGTH, 'coil.winding.pitch', 'Pitch');
  if (count > 1 && w.pitch < 2.06 * section.halfAxial) {
    throw new InductionInputError(
      'turns-overlap',
      'coil.winding.pitch',
      'Neighbouring turns touch at this pitch.',
    );
  }
  const loops = Array.from({ length: count }, (_, k) =>
    loop.map((value, i) => (i % 3 === 2 ? value + (k - (count - 1) / 2) * w.pitch : value)),
  );
  return { loops, turns, pitch: w.pitch, turnLength, equivalentRadius: (2 * area) / turnLength };
}

const CHORDS_PER_CORNER = 6;

function roundedRectangle(a: number, b: number, c: number): Float64Array {
  const path = new Path();
  const x = a / 2 - c;
  const y = b / 2 - c;
  const quarter = Math.PI / 2;
  for (const [k, [sx, sy]] of (
    [
      [1, 1],
      [-1, 1],
      [-1, -1],
      [1, -1],
    ] as const
  ).entries()) {
    path.arc(sx * x, sy * y, Math.max(c, 1e-9), k * quarter, (k + 1) * quarter, CHORDS_PER_CORNER, 0);
  }
  path.to(x + c, y, 0);
  return path.done();
}

function hairpinLoop(length: number, r: number): Float64Array {
  const path = new Path();
  path.to(0, -r, 0).to(length, -r, 0);
  path.arc(length, 0, r, -Math.PI / 2, Math.PI / 2, 2 * CHORDS_PER_CORNER, 0);
  path.to(0, r, 0).to(0, -r, 0);
  return path.done();
}

function channelLoop(a: number, b: number, rise: number): Float64Array {
  const path = new Path();
  const x = a / 2;
  const y = b / 2;
  path.to(-x, y, 0).to(x, y, 0).to(x, y, rise).to(x, -y, rise).to(x, -y, 0);
  path.to(-x, -y, 0).to(-x, -y, rise).to(-x, y, rise).to(-x, y, 0);
  return path.done();
}
