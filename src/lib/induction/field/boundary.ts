import type { Ring } from '../coil/rings.ts';
import type { Section } from '../coil/section.ts';
import { gaussLegendre } from './quadrature.ts';

/** A piece of a contour in the (r, z) half plane: straight, or a convex circular arc. */
export interface Panel {
  /** Middle and half vector of a straight panel; centre of an arc. */
  r: number;
  z: number;
  /** Half vector (straight). */
  hr: number;
  hz: number;
  /** Arc: radius > 0, mid angle and half angle; straight: radius 0. */
  radius: number;
  midAngle: number;
  halfAngle: number;
  /** Outward normal (straight). */
  nr: number;
  nz: number;
  length: number;
  /** First node, in the numbering of the whole boundary. */
  start: number;
}

/** One closed conductor surface. Nodes `start … start + count − 1` of the boundary. */
export interface Body {
  /** Index of the turn, or −1 for a part. */
  turn: number;
  /** Index of the part, or −1 for a turn. */
  load: number;
  start: number;
  count: number;
  /** Round tube: equispaced angles, trigonometric basis. null: panels with Gauss nodes. */
  round: { r: number; z: number; a: number } | null;
  panels: Panel[];
  /** For turns: place of the section's centre; equal shapes share their assembled blocks. */
  centre: Ring | null;
}

/** Nodes of all surfaces: place, outward normal (out of the metal), weight (length per node). */
export interface Boundary {
  n: number;
  r: Float64Array;
  z: Float64Array;
  nr: Float64Array;
  nz: Float64Array;
  w: Float64Array;
  bodies: Body[];
  /** Nodes per panel. */
  order: number;
}

/** Straight panel from (r0, z0) to (r1, z1) with the outward normal (nr, nz). */
export function straightPanel(r0: number, z0: number, r1: number, z1: number, nr: number, nz: number): Panel {
  return {
    r: 0.5 * (r0 + r1),
    z: 0.5 * (z0 + z1),
    hr: 0.5 * (r1 - r0),
    hz: 0.5 * (z1 - z0),
    radius: 0,
    midAngle: 0,
    halfAngle: 0,
    nr,
    nz,
    length: Math.hypot(r1 - r0, z1 - z0),
    start: 0,
  };
}

function arcPanel(r: number, z: number, radius: number, from: number, to: number): Panel {
  return {
    r,
    z,
    hr: 0,
    hz: 0,
    radius,
    midAngle: 0.5 * (from + to),
    halfAngle: 0.5 * (to - from),
    nr: 0,
    nz: 0,
    length: radius * Math.abs(to - from),
    start: 0,
  };
}

/** Split of each flat of a rectangular tube: graded towards the corners, where the current crowds. */
const FLAT_BREAKS = [0, 0.175, 0.5, 0.825, 1];

/**
 * Panels of a (rounded) rectangular section about (r, z), in order: top flat inwards… the sequence runs
 * counter-clockwise from the outer flat: outer (+r), top (+z), inner (−r), bottom (−z), an arc after
 * each flat when the corners are round.
 */
export function rectanglePanels(centre: Ring, section: Section & { kind: 'rectangular' }): Panel[] {
  const { halfAxial: hz, halfRadial: hr, outerCorner: c } = section;
  const breaks = FLAT_BREAKS;
  const panels: Panel[] = [];
  for (let side = 0; side < 4; side++) {
    const angle = (side * Math.PI) / 2;
    const nr = Math.round(Math.cos(angle));
    const nz = Math.round(Math.sin(angle));
    // Along the flat, counter-clockwise: tangent (−nz, nr).
    const half = (side % 2 === 0 ? hz : hr) - c;
    const away = side % 2 === 0 ? hr : hz;
    const midR = centre.radius + nr * away;
    const midZ = centre.z + nz * away;
    if (half > 1e-9) {
      for (let k = 0; k + 1 < breaks.length; k++) {
        const s0 = half * (2 * (breaks[k] ?? 0) - 1);
        const s1 = half * (2 * (breaks[k + 1] ?? 0) - 1);
        panels.push(straightPanel(midR - nz * s0, midZ + nr * s0, midR - nz * s1, midZ + nr * s1, nr, nz));
      }
    }
    if (c > 0) {
      // Corner between this side and the next one.
      const next = angle + Math.PI / 2;
      const mr = Math.round(Math.cos(next));
      const mz = Math.round(Math.sin(next));
      const cr = centre.radius + (nr + mr) * (hr - c);
      const cz = centre.z + (nz + mz) * (hz - c);
      // A large radius takes the place of the flats: two panels, or its current is resolved too coarsely.
      const pieces = c > 0.3 * Math.min(hr, hz) ? 2 : 1;
      for (let k = 0; k < pieces; k++) {
        const step = (next - angle) / pieces;
        panels.push(arcPanel(cr, cz, c, angle + k * step, angle + (k + 1) * step));
      }
    }
  }
  return panels;
}

/** Builds node arrays from turns (rings of one section) and part contours given as panels. */
export function buildBoundary(
  rings: Ring[],
  section: Section,
  nodesPerRound: number,
  order: number,
  parts: Panel[][],
): Boundary {
  const bodies: Body[] = [];
  let n = 0;
  for (const [turn, ring] of rings.entries()) {
    if (section.kind === 'round') {
      const round = { r: ring.radius, z: ring.z, a: section.radius };
      bodies.push({ turn, load: -1, start: n, count: nodesPerRound, round, panels: [], centre: ring });
      n += nodesPerRound;
    } else {
      const panels = rectanglePanels(ring, section);
      bodies.push({
        turn,
        load: -1,
        start: n,
        count: panels.length * order,
        round: null,
        panels,
        centre: ring,
      });
      n += panels.length * order;
    }
  }
  for (const [load, panels] of parts.entries()) {
    bodies.push({
      turn: -1,
      load,
      start: n,
      count: panels.length * order,
      round: null,
      panels,
      centre: null,
    });
    n += panels.length * order;
  }
  const b: Boundary = {
    n,
    r: new Float64Array(n),
    z: new Float64Array(n),
    nr: new Float64Array(n),
    nz: new Float64Array(n),
    w: new Float64Array(n),
    bodies,
    order,
  };
  for (const body of bodies) fillNodes(b, body);
  return b;
}

function fillNodes(b: Boundary, body: Body): void {
  if (body.round !== null) {
    const { r, z, a } = body.round;
    for (let i = 0; i < body.count; i++) {
      const angle = (2 * Math.PI * i) / body.count;
      // Exact symmetry about the section's own middle plane: the lower half mirrors the upper.
      const mirrored = 2 * i > body.count ? body.count - i : i;
      const c = Math.cos((2 * Math.PI * mirrored) / body.count);
      const s =
        i === mirrored
          ? 2 * i === body.count
            ? 0
            : Math.sin(angle)
          : -Math.sin((2 * Math.PI * mirrored) / body.count);
      const k = body.start + i;
      b.r[k] = r + a * c;
      b.z[k] = z + a * s;
      b.nr[k] = c;
      b.nz[k] = s;
      b.w[k] = (2 * Math.PI * a) / body.count;
    }
    return;
  }
  const rule = gaussLegendre(b.order);
  let k = body.start;
  for (const panel of body.panels) {
    panel.start = k;
    for (let i = 0; i < b.order; i++) {
      pointOn(panel, rule.x[i] as number);
      b.r[k] = point[0] as number;
      b.z[k] = point[1] as number;
      b.nr[k] = point[2] as number;
      b.nz[k] = point[3] as number;
      b.w[k] = ((rule.w[i] as number) * panel.length) / 2;
      k++;
    }
  }
}

/** Scratch of `pointOn`: r, z, nr, nz. */
export const point = new Float64Array(4);

/** Place and outward normal at parameter t ∈ [−1, 1] of a panel, left in `point`. */
export function pointOn(panel: Panel, t: number): void {
  if (panel.radius === 0) {
    point[0] = panel.r + t * panel.hr;
    point[1] = panel.z + t * panel.hz;
    point[2] = panel.nr;
    point[3] = panel.nz;
    return;
  }
  const angle = panel.midAngle + t * panel.halfAngle;
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  point[0] = panel.r + panel.radius * c;
  point[1] = panel.z + panel.radius * s;
  point[2] = c;
  point[3] = s;
}
