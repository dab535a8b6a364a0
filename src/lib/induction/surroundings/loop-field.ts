/** Magnetic flux density of current rings and straight conductors in air. */
import { MU0 } from '../constants/physical.ts';

export interface Vector {
  x: number;
  y: number;
  z: number;
}

/** Complete elliptic integrals K and E of parameter m = k² (0 ≤ m < 1), by the arithmetic–geometric mean. */
export function ellipticKE(m: number): { k: number; e: number } {
  let a = 1;
  let b = Math.sqrt(1 - m);
  let c = Math.sqrt(m);
  let sum = c * c;
  let weight = 1;
  while (c > 1e-15) {
    const next = (a + b) / 2;
    c = (a - b) / 2;
    b = Math.sqrt(a * b);
    a = next;
    weight *= 2;
    sum += weight * c * c;
  }
  const k = Math.PI / (2 * a);
  return { k, e: k * (1 - sum / 2) };
}

/**
 * Flux density of a ring of radius a at (r, z) from its centre, T for 1 A.
 * Source: Smythe, Static and Dynamic Electricity; any text on circular loops.
 * @returns radial and axial component
 */
export function ringField(a: number, r: number, z: number): { r: number; z: number } {
  if (r < 1e-9 * a) return { r: 0, z: (MU0 * a * a) / (2 * (a * a + z * z) ** 1.5) };
  const alpha2 = (a - r) ** 2 + z * z;
  const beta2 = (a + r) ** 2 + z * z;
  const beta = Math.sqrt(beta2);
  const { k, e } = ellipticKE(1 - alpha2 / beta2);
  const c = MU0 / (2 * Math.PI * alpha2 * beta);
  const r2 = r * r + z * z;
  return { r: ((c * z) / r) * ((a * a + r2) * e - alpha2 * k), z: c * ((a * a - r2) * e + alpha2 * k) };
}

/** Flux density of a straight conductor from p to q carrying 1 A from p to q (Biot–Savart), T. */
export function segmentField(p: Vector, q: Vector, at: Vector): Vector {
  const length = Math.hypot(q.x - p.x, q.y - p.y, q.z - p.z);
  if (length === 0) return { x: 0, y: 0, z: 0 };
  const u = { x: (q.x - p.x) / length, y: (q.y - p.y) / length, z: (q.z - p.z) / length };
  const d = { x: at.x - p.x, y: at.y - p.y, z: at.z - p.z };
  const along = d.x * u.x + d.y * u.y + d.z * u.z;
  const cross = { x: u.y * d.z - u.z * d.y, y: u.z * d.x - u.x * d.z, z: u.x * d.y - u.y * d.x };
  const away2 = cross.x ** 2 + cross.y ** 2 + cross.z ** 2;
  if (away2 < 1e-18) return { x: 0, y: 0, z: 0 };
  const first = along / Math.hypot(d.x, d.y, d.z);
  const last = (length - along) / Math.hypot(at.x - q.x, at.y - q.y, at.z - q.z);
  const b = ((MU0 / (4 * Math.PI)) * (first + last)) / away2;
  return { x: cross.x * b, y: cross.y * b, z: cross.z * b };
}

export interface FieldSource {
  /** Turns as rings about z. */
  rings: readonly { radius: number; z: number }[];
  /** Turns over rings: a fractional winding in the same envelope. */
  turnsPerRing: number;
  /** Go and return conductors along +x from the winding, one above the other; null without leads. */
  leads: { start: number; length: number; spacing: number } | null;
}

/** Flux density of the whole coil at a point for 1 A, T. */
export function coilField(source: FieldSource, at: Vector): number {
  const r = Math.hypot(at.x, at.y);
  let br = 0;
  let bz = 0;
  for (const ring of source.rings) {
    const b = ringField(ring.radius, r, at.z - ring.z);
    br += b.r * source.turnsPerRing;
    bz += b.z * source.turnsPerRing;
  }
  let x = r > 0 ? (br * at.x) / r : 0;
  let y = r > 0 ? (br * at.y) / r : 0;
  let z = bz;
  if (source.leads) {
    const { start, length, spacing } = source.leads;
    const end = start + length;
    for (const [height, from, to] of [
      [spacing / 2, start, end],
      [-spacing / 2, end, start],
    ] as const) {
      const b = segmentField({ x: from, y: 0, z: height }, { x: to, y: 0, z: height }, at);
      x += b.x;
      y += b.y;
      z += b.z;
    }
  }
  return Math.hypot(x, y, z);
}

const directions: readonly Vector[] = [
  { x: 1, y: 0, z: 0 },
  { x: -1, y: 0, z: 0 },
  { x: 0, y: 1, z: 0 },
  { x: 0, y: 0, z: 1 },
  { x: Math.SQRT1_2, y: 0, z: Math.SQRT1_2 },
  { x: Math.SQRT1_2, y: 0, z: -Math.SQRT1_2 },
  { x: -Math.SQRT1_2, y: 0, z: Math.SQRT1_2 },
];

/** Largest flux density at a distance from the coil's middle over axis, side and diagonal, T for 1 A. */
export function worstFieldAt(source: FieldSource, distance: number): number {
  return Math.max(
    ...directions.map((u) => coilField(source, { x: u.x * distance, y: u.y * distance, z: u.z * distance })),
  );
}

/**
 * Distance from the coil's middle beyond which the flux density stays below `level`, m; searched from 50 m inwards,
 * 0 when it is below everywhere outside the winding.
 */
export function keepOutDistance(source: FieldSource, current: number, level: number): number {
  const reach = Math.max(...source.rings.map((ring) => Math.hypot(ring.radius, ring.z)), 1e-3);
  const edge = Math.max(reach, source.leads ? source.leads.start + source.leads.length : 0) * 1.05;
  let high = 50;
  if (worstFieldAt(source, high) * current > level) return high;
  let low = high;
  while (low > edge && worstFieldAt(source, low) * current <= level) {
    high = low;
    low /= 1.1;
  }
  if (low <= edge && worstFieldAt(source, edge) * current <= level) return 0;
  low = Math.max(low, edge);
  for (let i = 0; i < 40; i++) {
    const middle = (low + high) / 2;
    if (worstFieldAt(source, middle) * current > level) low = middle;
    else high = middle;
  }
  return high;
}
