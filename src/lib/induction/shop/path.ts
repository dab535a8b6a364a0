/** Length and bends of the copper, shape by shape. */
import type { Coil, Workpiece } from '../check/types.ts';
import { isAxisymmetric, ringCoil } from '../coil/rings.ts';
import { sectionOf, type Section } from '../coil/section.ts';

export interface CopperPath {
  /** Of the turns along the centre line, m. */
  windingLength: number;
  turns: number;
  /** Smallest centre-line bend radius, m. */
  bendRadius: number;
  bends: number;
  /** Mean diameter of the winding for the water's secondary flow; null where most of the path is straight. */
  coilDiameter: number | null;
}

/**
 * The copper's way through the winding.
 * Round shapes: Σ √((2πR)² + pitch²); others: the rounded polygon of the turn's centre line, plus one pitch per turn.
 *
 * @throws InductionInputError for a winding that cannot be (see `ringCoil`)
 * @returns null for a coil by drawing
 */
export function copperPath(coil: Coil, part: Workpiece | null): CopperPath | null {
  const w = coil.winding;
  if (w.shape === 'drawing') return null;
  if (isAxisymmetric(w)) {
    const rings = ringCoil(coil, part);
    const share = rings.turns / rings.rings.length;
    const rise = w.shape === 'pancake' || w.shape === 'single-turn' ? 0 : rings.pitch;
    const length =
      rings.rings.reduce((sum, ring) => sum + Math.hypot(2 * Math.PI * ring.radius, rise), 0) * share;
    const radii = rings.rings.map((ring) => ring.radius);
    return {
      windingLength: length,
      turns: rings.turns,
      bendRadius: Math.min(...radii),
      bends: Math.ceil(rings.turns),
      coilDiameter: (2 * radii.reduce((sum, r) => sum + r, 0)) / radii.length,
    };
  }
  return polygonPath(coil, sectionOf(coil.tube));
}

function polygonPath(coil: Coil, section: Section): CopperPath | null {
  const w = coil.winding;
  const half = section.halfRadial;
  if (w.shape === 'racetrack' || w.shape === 'rectangular-helix') {
    const turns = w.turns ?? 1;
    const corner = (w.shape === 'racetrack' ? w.insideWidth / 2 : w.cornerRadius) + half;
    const round = 2 * (w.insideLength + w.insideWidth + 4 * half) - (8 - 2 * Math.PI) * corner;
    return {
      windingLength: turns * Math.hypot(round, w.pitch),
      turns,
      bendRadius: corner,
      bends: Math.ceil(turns) * (w.shape === 'racetrack' ? 2 : 4),
      coilDiameter: null,
    };
  }
  if (w.shape === 'hairpin') {
    const turns = w.turns ?? 1;
    const radius = (w.legGap + 2 * half) / 2;
    return {
      windingLength: turns * (2 * Math.max(0, w.length - radius) + Math.PI * radius),
      turns,
      bendRadius: radius,
      bends: Math.max(1, Math.ceil(turns)),
      coilDiameter: null,
    };
  }
  if (w.shape === 'channel') {
    const turns = w.turns ?? 1;
    // Along both sides, across both ends, and up and down over the part at each end.
    const round = 2 * (w.insideLength + w.insideWidth + 4 * half) + 4 * w.crossingHeight;
    return {
      windingLength: turns * Math.hypot(round, w.pitch),
      turns,
      // The corners of a channel are bent at about twice the tube (common practice) or mitred.
      bendRadius: 4 * half,
      bends: Math.ceil(turns) * 8,
      coilDiameter: null,
    };
  }
  return null;
}

/** Size of the tube in the plane of bending, m. */
export const bendingSize = (section: Section): number => 2 * section.halfRadial;

/** Wall at the outer fibre after bending, t·R/(R + d/2), m (constant volume). */
export const wallAfterBending = (wall: number, bendRadius: number, size: number): number =>
  (wall * bendRadius) / (bendRadius + size / 2);
