import type { PartBody, RingCoil } from '../coil/rings.ts';
import { partGap } from '../coil/rings.ts';
import { straightPanel, type Panel } from './boundary.ts';
import { equidistributed } from './quadrature.ts';

/** Panel sizes on a part: along its cylindrical sides by z, and along its end faces by r. */
export interface LoadSizes {
  h0: number;
  side(z: number): number;
  end(which: 'low' | 'high', r: number): number;
}

const CORNER_RATIO = 0.35;

/**
 * Panel sizes: h0 = min(pitch, max(1.5·gap, min(pitch/3, 0.45·tube))) opposite the coil (pitch := tube size
 * for one turn),
 * growing beyond the coil ends as 0.6 of the distance; end faces max(h0, ro/3), except a face that
 * turns look at from beyond it (pancake), where the axial clearance is the gap.
 */
export function loadSizes(coil: RingCoil, body: PartBody): LoadSizes {
  const { rings, section } = coil;
  const tube = 2 * section.halfAxial;
  const pitch = rings.length === 1 ? tube : Math.max(Math.min(coil.pitch, 4 * tube), 0.5 * tube);
  const gap = Math.min(...rings.map((ring) => partGap(ring, section, body)));
  // Opposite wide-set tubes close to the part the current follows the single tube, not the pitch.
  const h0 = Math.min(pitch, Math.max(1.5 * gap, Math.min(pitch / 3, 0.45 * tube)));
  const first = Math.min(...rings.map((ring) => ring.z)) - section.halfAxial;
  const last = Math.max(...rings.map((ring) => ring.z)) + section.halfAxial;
  const innerR = Math.min(...rings.map((ring) => ring.radius)) - section.halfRadial;
  const outerR = Math.max(...rings.map((ring) => ring.radius)) + section.halfRadial;
  const faces = (which: 'low' | 'high') =>
    rings.some((ring) => {
      const beyond = which === 'low' ? ring.z < body.low : ring.z > body.high;
      return (
        beyond &&
        ring.radius - section.halfRadial < body.outerRadius &&
        ring.radius + section.halfRadial > body.innerRadius
      );
    });
  const facing = { low: faces('low'), high: faces('high') };
  const thickness = body.outerRadius - body.innerRadius;
  return {
    h0,
    side: (z) => Math.max(h0, 0.6 * Math.max(0, first - z, z - last)),
    end: (which, r) => {
      if (facing[which]) return Math.max(h0, 0.6 * Math.max(0, innerR - r, r - outerR));
      return Math.max(h0, (body.innerRadius > 0 ? thickness : body.outerRadius) / 3);
    },
  };
}

/** Corner refinement: breaks with `levels` geometric sub-panels next to each corner of the stretch. */
function refine(breaks: Float64Array, levels: number, atStart: boolean, atEnd: boolean): number[] {
  const out = Array.from(breaks);
  if (levels === 0 || out.length < 2) return out;
  if (out.length === 2 && atStart && atEnd) out.splice(1, 0, 0.5 * ((out[0] as number) + (out[1] as number)));
  const head: number[] = [];
  const tail: number[] = [];
  const first = out[0] as number;
  const last = out[out.length - 1] as number;
  for (let k = levels; k >= 1; k--) {
    const share = CORNER_RATIO ** k;
    if (atStart) head.push(first + ((out[1] as number) - first) * share);
    if (atEnd) tail.unshift(last - (last - (out[out.length - 2] as number)) * share);
  }
  return [first, ...head, ...out.slice(1, -1), ...tail, last];
}

/** The closed contour of a part as panels: outer side, ends, bore; normals out of the metal. */
export function loadContour(body: PartBody, sizes: LoadSizes, levels: number): Panel[] {
  const panels: Panel[] = [];
  const { outerRadius: ro, innerRadius: ri, low, high } = body;
  const hollow = ri > 0;
  const sides = refine(equidistributed(low, high, sizes.side, 1), levels, true, true);
  for (let k = 0; k + 1 < sides.length; k++) {
    const a = sides[k] as number;
    const b = sides[k + 1] as number;
    panels.push(straightPanel(ro, a, ro, b, 1, 0));
    if (hollow) panels.push(straightPanel(ri, b, ri, a, -1, 0));
  }
  for (const which of ['low', 'high'] as const) {
    const z = which === 'low' ? low : high;
    const nz = which === 'low' ? -1 : 1;
    const breaks = refine(
      equidistributed(ri, ro, (r) => sizes.end(which, r), 1),
      levels,
      hollow,
      true,
    );
    for (let k = 0; k + 1 < breaks.length; k++) {
      panels.push(straightPanel(breaks[k] as number, z, breaks[k + 1] as number, z, 0, nz));
    }
  }
  return panels;
}
