import { MU0 } from '../constants/physical.ts';
import { InductionInputError } from '../input-error.ts';
import { gaussLegendre } from './quadrature.ts';

/** Corner points of one conductor as x, y, z triples, m; consecutive points are straight segments. */
export type Polyline = Float64Array;

/** Most segments of one inductance: pairs grow with the square. */
export const MOST_SEGMENTS = 4000;

interface Segments {
  count: number;
  /** Start point and unit direction, 6 numbers each. */
  at: Float64Array;
  length: Float64Array;
  conductor: Int32Array;
}

function segmentsOf(lines: Polyline[]): Segments {
  const at: number[] = [];
  const length: number[] = [];
  const conductor: number[] = [];
  for (const [c, line] of lines.entries()) {
    for (let k = 0; k + 5 < line.length; k += 3) {
      const dx = (line[k + 3] as number) - (line[k] as number);
      const dy = (line[k + 4] as number) - (line[k + 1] as number);
      const dz = (line[k + 5] as number) - (line[k + 2] as number);
      const l = Math.hypot(dx, dy, dz);
      // A point given twice makes no segment.
      if (l < 1e-12) continue;
      at.push(line[k] as number, line[k + 1] as number, line[k + 2] as number, dx / l, dy / l, dz / l);
      length.push(l);
      conductor.push(c);
    }
  }
  return {
    count: length.length,
    at: Float64Array.from(at),
    length: Float64Array.from(length),
    conductor: Int32Array.from(conductor),
  };
}

/**
 * Inductance of conductors in series along straight segments, H.
 *
 * Per pair M = μ0/4π·(u1·u2)·∫ ln[(R1+R2+l2)/(R1+R2−l2)] ds, the inner integral exact, the outer by Gauss
 * points; within one conductor every distance is √(R² + g²), with g the geometric mean distance of its
 * section (the tube's radius for surface current), between conductors g = 0.
 *
 * @param lines one polyline per conductor; closed loops repeat their first point at the end
 * @param g m, > 0
 * Range: thin conductors, any layout. Error below 1e-4 of the thin-wire integral with ≥ 4 chords per 90°.
 * Source: Neumann's integral; Campbell, Mutual inductances of circuits composed of straight wires (1915).
 */
export function pathInductance(lines: Polyline[], g: number): number {
  const s = segmentsOf(lines);
  if (s.count > MOST_SEGMENTS) {
    throw new InductionInputError(
      'too-many-unknowns',
      'coil.winding.turns',
      'The winding has too many segments.',
    );
  }
  let total = 0;
  for (let i = 0; i < s.count; i++) {
    total += selfTerm(s.length[i] as number, g);
    for (let j = i + 1; j < s.count; j++) {
      total += 2 * pairTerm(s, i, j, s.conductor[i] === s.conductor[j] ? g : 0);
    }
  }
  return total;
}

/** Self term of a straight piece, consistent with g in its neighbours. */
function selfTerm(l: number, g: number): number {
  return ((MU0 * l) / (2 * Math.PI)) * (Math.asinh(l / g) - Math.sqrt(1 + (g / l) ** 2) + g / l);
}

const four = gaussLegendre(4);
const eight = gaussLegendre(8);

function pairTerm(s: Segments, i: number, j: number, g: number): number {
  const { at, length } = s;
  const a = 6 * i;
  const b = 6 * j;
  const dot =
    (at[a + 3] as number) * (at[b + 3] as number) +
    (at[a + 4] as number) * (at[b + 4] as number) +
    (at[a + 5] as number) * (at[b + 5] as number);
  if (Math.abs(dot) < 1e-12) return 0;
  const l1 = length[i] as number;
  const l2 = length[j] as number;
  const mx =
    (at[a] as number) +
    0.5 * l1 * (at[a + 3] as number) -
    (at[b] as number) -
    0.5 * l2 * (at[b + 3] as number);
  const my =
    (at[a + 1] as number) +
    0.5 * l1 * (at[a + 4] as number) -
    (at[b + 1] as number) -
    0.5 * l2 * (at[b + 4] as number);
  const mz =
    (at[a + 2] as number) +
    0.5 * l1 * (at[a + 5] as number) -
    (at[b + 2] as number) -
    0.5 * l2 * (at[b + 5] as number);
  const apart = Math.hypot(mx, my, mz) - 0.5 * (l1 + l2);
  const factor = (MU0 / (4 * Math.PI)) * dot;
  if (apart > l1) return factor * gaussOver(s, a, b, l2, g, 0, l1);
  return factor * splitOver(s, a, b, l1, l2, g);
}

/** ∫ over [from, to] of segment 1 with 4 points: the integrand is smooth there. */
function gaussOver(
  s: Segments,
  a: number,
  b: number,
  l2: number,
  g: number,
  from: number,
  to: number,
): number {
  let sum = 0;
  const half = 0.5 * (to - from);
  for (let q = 0; q < 4; q++) {
    sum += (four.w[q] as number) * logTerm(s, a, b, l2, g, from + half * (1 + (four.x[q] as number)));
  }
  return half * sum;
}

/** Near pairs: split where segment 1 passes nearest and at the ends of segment 2, ends smoothed. */
function splitOver(s: Segments, a: number, b: number, l1: number, l2: number, g: number): number {
  const { at } = s;
  const along = (x: number, y: number, z: number) =>
    (x - (at[a] as number)) * (at[a + 3] as number) +
    (y - (at[a + 1] as number)) * (at[a + 4] as number) +
    (z - (at[a + 2] as number)) * (at[a + 5] as number);
  const start = along(at[b] as number, at[b + 1] as number, at[b + 2] as number);
  const end = along(
    (at[b] as number) + l2 * (at[b + 3] as number),
    (at[b + 1] as number) + l2 * (at[b + 4] as number),
    (at[b + 2] as number) + l2 * (at[b + 5] as number),
  );
  const cuts = [0, l1];
  for (const x of [start, end, 0.5 * (start + end)]) if (x > 1e-9 * l1 && x < l1 * (1 - 1e-9)) cuts.push(x);
  cuts.sort((p, q) => p - q);
  let sum = 0;
  for (let k = 0; k + 1 < cuts.length; k++) {
    const from = cuts[k] as number;
    const span = (cuts[k + 1] as number) - from;
    if (span <= 0) continue;
    for (let q = 0; q < 8; q++) {
      const u = 0.5 * (1 + (eight.x[q] as number));
      const w = 0.5 * (eight.w[q] as number) * 6 * u * (1 - u) * span;
      sum += w * logTerm(s, a, b, l2, g, from + span * u * u * (3 - 2 * u));
    }
  }
  return sum;
}

/** ln[(R1+R2+l2)/(R1+R2−l2)] from the point at distance t along segment 1. */
function logTerm(s: Segments, a: number, b: number, l2: number, g: number, t: number): number {
  const { at } = s;
  const x = (at[a] as number) + t * (at[a + 3] as number) - (at[b] as number);
  const y = (at[a + 1] as number) + t * (at[a + 4] as number) - (at[b + 1] as number);
  const z = (at[a + 2] as number) + t * (at[a + 5] as number) - (at[b + 2] as number);
  const p = x * (at[b + 3] as number) + y * (at[b + 4] as number) + z * (at[b + 5] as number);
  const d2 = Math.max(0, x * x + y * y + z * z - p * p) + g * g;
  const r1 = Math.sqrt(p * p + d2);
  const r2 = Math.sqrt((l2 - p) * (l2 - p) + d2);
  // asinh form of the same logarithm: no cancellation when the point lies beside or on the line.
  if (d2 < 1e-30) return Math.log((r1 + r2 + l2) / Math.max(r1 + r2 - l2, 1e-15 * l2));
  const d = Math.sqrt(d2);
  return Math.asinh(p / d) + Math.asinh((l2 - p) / d);
}

/**
 * Inductance of a go-and-return pair of round leads with surface current, H per metre:
 * (μ0/π)·acosh(D/2a). Source: exact two-cylinder solution. Example: 20 mm apart, 6.35 mm → 0.7257 µH/m.
 */
export function leadPairInductance(spacing: number, a: number): number {
  return (MU0 / Math.PI) * Math.acosh(Math.max(1, spacing / (2 * a)));
}

/** What the thin-wire integral gives for the same pair, H per metre: (μ0/π)·ln(D/a). */
export function thinPairInductance(spacing: number, a: number): number {
  return (MU0 / Math.PI) * Math.log(spacing / a);
}
