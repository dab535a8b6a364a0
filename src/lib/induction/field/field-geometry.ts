import type { PartBody, RingCoil } from '../coil/rings.ts';
import { partGap, surfaceGap } from '../coil/rings.ts';
import type { Section } from '../coil/section.ts';
import type { SolverSetting } from '../check/types.ts';
import { InductionInputError } from '../input-error.ts';
import { assembleBlock, nearOrder } from './assemble.ts';
import { buildBoundary, type Body, type Boundary } from './boundary.ts';
import { loadContour, loadSizes, type LoadSizes } from './load-contour.ts';

/** Resolution of one setting. */
export interface Resolution {
  nodesPerRound: number;
  /** Gauss nodes per panel. */
  order: number;
  cornerLevels: number;
  /** First finite element in skin depths. */
  depthShare: number;
  /** Relative change of the impedance at which the permeability loop stops. */
  tolerance: number;
}

/** Most unknowns of the reduced system: about two seconds of elimination on one core. */
export const MOST_UNKNOWNS = 1100;

/**
 * Resolution by setting and geometry: more nodes per round tube where surfaces are close. Counts depend
 * only on ratios of distances, so that small changes of a dimension leave them alone except at a step.
 */
export function resolutionOf(setting: SolverSetting, coil: RingCoil, parts: PartBody[]): Resolution {
  const size = 2 * Math.min(coil.section.halfAxial, coil.section.halfRadial);
  let turnGap = Number.POSITIVE_INFINITY;
  for (let k = 1; k < coil.rings.length; k++) {
    const a = coil.rings[k - 1];
    const b = coil.rings[k];
    if (a !== undefined && b !== undefined) turnGap = Math.min(turnGap, surfaceGap(a, b, coil.section));
  }
  let loadGap = Number.POSITIVE_INFINITY;
  for (const part of parts) {
    for (const ring of coil.rings) loadGap = Math.min(loadGap, partGap(ring, coil.section, part));
  }
  const tight = Math.min(turnGap, loadGap * 0.8) / size;
  const preview = setting === 'preview';
  let nodes = preview ? 8 : setting === 'fine' ? 16 : 12;
  if (tight < 0.2) nodes = preview ? 10 : 16;
  if (tight < 0.08) nodes = preview ? 12 : 24;
  if (tight < 0.05) nodes = preview ? 16 : 32;
  return {
    nodesPerRound: nodes,
    order: preview ? 2 : setting === 'fine' ? 4 : 3,
    cornerLevels: preview ? 2 : setting === 'fine' ? 3 : 2,
    depthShare: preview ? 1 : setting === 'fine' ? 0.5 : 0.7,
    tolerance: preview ? 3e-3 : setting === 'fine' ? 2e-4 : 1e-3,
  };
}

/** A turn among the kept unknowns: `start`/`count` in kept columns. */
export interface KeptTurn {
  turn: number;
  /** The turn whose mirror image it carries (itself when on the plane, −1 without symmetry). */
  mirror: number;
  start: number;
  count: number;
  body: Body;
  /** True: lies on the mirror plane; its lower nodes are folded onto the upper ones. */
  folded: boolean;
}

export interface KeptLoad {
  load: number;
  start: number;
  count: number;
  body: Body;
  part: PartBody;
  sizes: LoadSizes;
}

/**
 * Everything that depends on geometry alone: nodes, kept unknowns under mirror symmetry, and the real
 * matrices sMatrix = 2π·S and yMatrix = 2π·(½·diag(r) − D), mirrored columns already added.
 */
export interface FieldGeometry {
  coil: RingCoil;
  /** Section as it is solved: a round tube bent tightly is solved as a rectangle with full corners. */
  section: Section;
  resolution: Resolution;
  boundary: Boundary;
  symmetric: boolean;
  /** Boundary node of each kept unknown; kept column of each boundary node. */
  kept: Int32Array;
  column: Int32Array;
  /** How often each kept node counts in the whole (2 off the mirror plane, else 1). */
  multiplicity: Float64Array;
  turns: KeptTurn[];
  loads: KeptLoad[];
  /** Kept unknowns of the turns come first: columns 0 … turnColumns − 1. */
  turnColumns: number;
  sMatrix: Float64Array;
  yMatrix: Float64Array;
}

const PLANE = 1e-9;

/**
 * Tube radius over ring radius above which the closed operator of a round tube (exact but for terms of the
 * square of this ratio) gives way to finite elements in the true toroidal section.
 */
const TIGHT_BEND = 0.25;

function solvedSection(coil: RingCoil): Section {
  const s = coil.section;
  if (s.kind !== 'round') return s;
  const smallest = Math.min(...coil.rings.map((ring) => ring.radius));
  if (s.radius <= TIGHT_BEND * smallest) return s;
  return {
    kind: 'rectangular',
    halfAxial: s.radius,
    halfRadial: s.radius,
    wall: s.wall,
    outerCorner: s.radius,
    innerCorner: Math.max(0, s.radius - s.wall),
  };
}

/**
 * Prepares the geometry of one coil with zero or more parts on its axis.
 *
 * @throws InductionInputError `too-many-unknowns` when even six nodes per turn exceed the limit
 */
export function prepareGeometry(coil: RingCoil, parts: PartBody[], wanted: Resolution): FieldGeometry {
  let resolution = wanted;
  const symmetric = isSymmetric(coil, parts);
  const section = solvedSection(coil);
  for (;;) {
    const sizes = parts.map((part) => loadSizes(coil, part));
    const contours = parts.map((part, k) =>
      loadContour(part, sizes[k] as LoadSizes, resolution.cornerLevels),
    );
    const boundary = buildBoundary(coil.rings, section, resolution.nodesPerRound, resolution.order, contours);
    const unknowns = (boundary.n + coil.rings.length) / (symmetric ? 2 : 1);
    if (unknowns <= MOST_UNKNOWNS)
      return assemble(coil, section, parts, sizes, boundary, resolution, symmetric);
    if (resolution.nodesPerRound > 6 || resolution.order > 2) {
      resolution = {
        ...resolution,
        nodesPerRound: Math.max(6, resolution.nodesPerRound - 4),
        order: resolution.nodesPerRound <= 8 ? 2 : resolution.order,
        cornerLevels: Math.min(1, resolution.cornerLevels),
      };
      continue;
    }
    throw new InductionInputError(
      'too-many-unknowns',
      'coil.winding.turns',
      `The coil and part need ${Math.round(unknowns)} unknowns; the limit is ${MOST_UNKNOWNS}. Use fewer turns or a shorter part.`,
    );
  }
}

function isSymmetric(coil: RingCoil, parts: PartBody[]): boolean {
  const scale = Math.max(...coil.rings.map((ring) => ring.radius));
  const eps = 1e-9 * scale;
  if (parts.some((part) => Math.abs(part.low + part.high) > eps)) return false;
  return coil.rings.every((ring) =>
    coil.rings.some(
      (other) => Math.abs(ring.z + other.z) < eps && Math.abs(ring.radius - other.radius) < eps,
    ),
  );
}

function assemble(
  coil: RingCoil,
  section: Section,
  parts: PartBody[],
  sizes: LoadSizes[],
  boundary: Boundary,
  resolution: Resolution,
  symmetric: boolean,
): FieldGeometry {
  const scale = Math.max(...coil.rings.map((ring) => ring.radius));
  const eps = PLANE * scale;
  const n = boundary.n;
  const column = new Int32Array(n).fill(-1);
  const kept: number[] = [];
  const turns: KeptTurn[] = [];
  const loads: KeptLoad[] = [];
  let turnColumns = 0;
  for (const body of boundary.bodies) {
    const place = body.centre;
    if (symmetric && place !== null && place.z < -eps) continue;
    const start = kept.length;
    for (let k = body.start; k < body.start + body.count; k++) {
      if (symmetric && (boundary.z[k] as number) < -eps) continue;
      column[k] = kept.length;
      kept.push(k);
    }
    const count = kept.length - start;
    if (place !== null) {
      const folded = symmetric && Math.abs(place.z) <= eps;
      const mirror = symmetric ? mirrorTurn(coil, body.turn, eps) : -1;
      turns.push({ turn: body.turn, mirror, start, count, body, folded });
      turnColumns = kept.length;
    } else {
      const part = parts[body.load] as PartBody;
      loads.push({ load: body.load, start, count, body, part, sizes: sizes[body.load] as LoadSizes });
    }
  }
  const multiplicity = new Float64Array(kept.length).fill(1);
  if (symmetric) {
    for (let k = 0; k < kept.length; k++) {
      if (Math.abs(boundary.z[kept[k] as number] as number) > eps) multiplicity[k] = 2;
    }
    mapMirrored(boundary, coil, column, eps);
  }
  const m = kept.length;
  const geometry: FieldGeometry = {
    coil,
    section,
    resolution,
    boundary,
    symmetric,
    kept: Int32Array.from(kept),
    column,
    multiplicity,
    turns,
    loads,
    turnColumns,
    sMatrix: new Float64Array(m * m),
    yMatrix: new Float64Array(m * m),
  };
  fillMatrices(geometry);
  return geometry;
}

function mirrorTurn(coil: RingCoil, turn: number, eps: number): number {
  const own = coil.rings[turn];
  return coil.rings.findIndex(
    (ring) => own !== undefined && Math.abs(ring.z + own.z) < eps && Math.abs(ring.radius - own.radius) < eps,
  );
}

/** Gives every dropped node the column of its mirror image. */
function mapMirrored(b: Boundary, coil: RingCoil, column: Int32Array, eps: number): void {
  for (const body of b.bodies) {
    const image =
      body.turn < 0
        ? body
        : (b.bodies.find((other) => other.turn === mirrorTurn(coil, body.turn, eps)) ?? body);
    for (let k = body.start; k < body.start + body.count; k++) {
      if ((column[k] as number) >= 0) continue;
      let best = -1;
      let distance = Number.POSITIVE_INFINITY;
      for (let q = image.start; q < image.start + image.count; q++) {
        const d =
          Math.abs((b.r[q] as number) - (b.r[k] as number)) +
          Math.abs((b.z[q] as number) + (b.z[k] as number));
        if (d < distance && (column[q] as number) >= 0 && (b.z[q] as number) >= -eps) {
          distance = d;
          best = q;
        }
      }
      column[k] = best < 0 ? 0 : (column[best] as number);
    }
  }
}

interface Block {
  s: Float64Array;
  d: Float64Array;
}

function fillMatrices(g: FieldGeometry): void {
  const { boundary: b, kept, column, sMatrix, yMatrix } = g;
  const m = kept.length;
  const near = nearOrder(g.resolution.nodesPerRound);
  const cache = new Map<string, Block>();
  const targets = [...g.turns, ...g.loads];
  for (const target of targets) {
    const rows = kept.subarray(target.start, target.start + target.count);
    for (const source of b.bodies) {
      const block = blockOf(b, target.body, source, rows, near, cache);
      for (let i = 0; i < rows.length; i++) {
        const into = (target.start + i) * m;
        // A block of all nodes of the target (shared) or of the kept rows only.
        const from = (block.all ? (rows[i] as number) - target.body.start : i) * source.count;
        for (let j = 0; j < source.count; j++) {
          const c = into + (column[source.start + j] as number);
          sMatrix[c] = (sMatrix[c] as number) + 2 * Math.PI * (block.s[from + j] as number);
          yMatrix[c] = (yMatrix[c] as number) - 2 * Math.PI * (block.d[from + j] as number);
        }
      }
    }
    for (let i = 0; i < rows.length; i++) {
      const c = (target.start + i) * m + target.start + i;
      yMatrix[c] = (yMatrix[c] as number) + Math.PI * (b.r[rows[i] as number] as number);
    }
  }
}

/**
 * Block of one target body against one source body. Turn against turn depends only on the two radii and
 * the axial distance, so that a regular coil needs one block per distance; a block for −dz is the one for
 * +dz with both sections mirrored.
 */
function blockOf(
  b: Boundary,
  target: Body,
  source: Body,
  rows: Int32Array,
  near: number,
  cache: Map<string, Block>,
): Block & { all: boolean } {
  const size = source.count;
  if (target.centre === null || source.centre === null) {
    const s = new Float64Array(rows.length * size);
    const d = new Float64Array(rows.length * size);
    assembleBlock(b, rows, source, near, s, d);
    return { s, d, all: false };
  }
  const dz = source.centre.z - target.centre.z;
  const unit = 1e-10;
  const key = `${Math.round(target.centre.radius / unit)}:${Math.round(source.centre.radius / unit)}:`;
  const own = key + Math.round(dz / unit);
  const known = cache.get(own);
  if (known !== undefined) return { ...known, all: true };
  const image = cache.get(key + Math.round(-dz / unit));
  const s = new Float64Array(target.count * size);
  const d = new Float64Array(target.count * size);
  if (image !== undefined && target.round !== null && source.round !== null) {
    const m = size;
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < m; j++) {
        const at = ((m - i) % m) * m + ((m - j) % m);
        s[i * m + j] = image.s[at] as number;
        d[i * m + j] = image.d[at] as number;
      }
    }
  } else {
    const all = Int32Array.from({ length: target.count }, (_, i) => target.start + i);
    assembleBlock(b, all, source, near, s, d);
  }
  const made = { s, d };
  cache.set(own, made);
  return { ...made, all: true };
}
