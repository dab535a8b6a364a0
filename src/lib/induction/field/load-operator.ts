import { MU0 } from '../constants/physical.ts';
import { InductionInputError } from '../input-error.ts';
import type { Body, Boundary, Panel } from './boundary.ts';
import { complexMatrix, type ComplexMatrix, type ComplexVector } from './complex-dense.ts';
import type { LoadGrid } from './load-grid.ts';
import { gaussLegendre, lagrange } from './quadrature.ts';
import { addEntry, factorSkyline, skyline, solveSkyline, type Skyline } from './skyline.ts';

/**
 * Quadratic finite elements for the azimuthal electric field in a part's section.
 *
 * Weak form: ∫[(1/μr)(∂zE ∂zw + (∂rE + E/r)(∂rw + w/r)) + jωμ0/ρ·E w] r dr dz = jωμ0 ∮ K w r dl, E = 0 on
 * the axis. Material per element, so that layers, temperature and saturation need no separate theory.
 * Source: Galerkin finite elements coupled to the boundary equation after Johnson & Nédélec (1980).
 */
export interface LoadElements {
  grid: LoadGrid;
  nr: number;
  nz: number;
  /** Free nodes (axis nodes are dropped); those on the surface come last, from `surface` on. */
  nodes: number;
  surface: number;
  /** First column of each row of their matrix. */
  first: Int32Array;
  /** Free-node number at tensor place (ir, iz), −1 on the axis; stride of the tensor is 2·nr + 1. */
  index: Int32Array;
  /**
   * At the 3 Gauss points of every element interval, per point 7 numbers: 3 shape values, 3 derivatives
   * (radial: N′ + N/r, the curl part), and the weight (radial: with r).
   */
  radial: Float64Array;
  axial: Float64Array;
  /** Boundary coupling B (free node × kept boundary column) and evaluation P, sparse by column / row. */
  coupling: SparseColumns;
  evaluation: SparseColumns;
}

/** Sparse matrix as one list of (row, value) per column. */
export interface SparseColumns {
  cols: number;
  rows: Int32Array[];
  values: Float64Array[];
}

/** Most free nodes of one part's grid. */
export const MOST_ELEMENTS_NODES = 30_000;

const gauss3 = gaussLegendre(3);

/** Values (0–2) and derivatives (3–5, in t) of the quadratic shape functions at t ∈ [−1, 1]. */
function shape(t: number, out: Float64Array): void {
  out[0] = 0.5 * t * (t - 1);
  out[1] = 1 - t * t;
  out[2] = 0.5 * t * (t + 1);
  out[3] = t - 0.5;
  out[4] = -2 * t;
  out[5] = t + 0.5;
}

/**
 * Builds the elements of one part.
 *
 * @param column maps a boundary node of this body to its column among the kept ones (mirror images share)
 * @param columns number of kept columns
 */
export function loadElements(
  b: Boundary,
  body: Body,
  grid: LoadGrid,
  column: Int32Array,
  columns: number,
  keptNodes: ArrayLike<number>,
): LoadElements {
  const nr = grid.r.length - 1;
  const nz = grid.z.length - 1;
  const nnr = 2 * nr + 1;
  const nnz = 2 * nz + 1;
  const axis = (grid.r[0] as number) <= 0 ? 1 : 0;
  const nodes = (nnr - axis) * nnz;
  if (nodes > MOST_ELEMENTS_NODES) {
    throw new InductionInputError(
      'too-many-unknowns',
      'part',
      'The part is too large against its skin depth to be resolved. Check dimensions and frequency.',
    );
  }
  const index = new Int32Array(nnr * nnz).fill(-1);
  const onSurface = (ir: number, iz: number) =>
    ir === nnr - 1 || (ir === 0 && axis === 0) || iz === nnz - 1 || (iz === 0 && !grid.half);
  // The inside along the shorter direction first, which keeps the profile narrow; the surface last, so that
  // its operator falls out of the elimination without solving for the inside.
  const radialFirst = nnr <= nnz;
  let count = 0;
  let surface = 0;
  for (const wanted of [false, true]) {
    if (wanted) surface = count;
    for (let p = 0; p < (radialFirst ? nnz : nnr); p++) {
      for (let q = 0; q < (radialFirst ? nnr : nnz); q++) {
        const ir = radialFirst ? q : p;
        const iz = radialFirst ? p : q;
        if (ir >= axis && onSurface(ir, iz) === wanted) index[iz * nnr + ir] = count++;
      }
    }
  }
  const elements: LoadElements = {
    grid,
    nr,
    nz,
    nodes,
    surface,
    first: profileOf(nr, nz, index, nodes),
    index,
    radial: pointTable(grid.r, true),
    axial: pointTable(grid.z, false),
    coupling: { cols: columns, rows: [], values: [] },
    evaluation: { cols: keptNodes.length, rows: [], values: [] },
  };
  elements.coupling = couplingOf(b, body, elements, column, columns);
  elements.evaluation = evaluationOf(b, elements, keptNodes);
  return elements;
}

function profileOf(nr: number, nz: number, index: Int32Array, nodes: number): Int32Array {
  const first = Int32Array.from({ length: nodes }, (_, i) => i);
  const nnr = 2 * nr + 1;
  for (let kz = 0; kz < nz; kz++) {
    for (let kr = 0; kr < nr; kr++) {
      let least = nodes;
      for (let k = 0; k < 9; k++) {
        const free = index[(2 * kz + ((k / 3) | 0)) * nnr + 2 * kr + (k % 3)] as number;
        if (free >= 0 && free < least) least = free;
      }
      for (let k = 0; k < 9; k++) {
        const free = index[(2 * kz + ((k / 3) | 0)) * nnr + 2 * kr + (k % 3)] as number;
        if (free >= 0 && least < (first[free] as number)) first[free] = least;
      }
    }
  }
  return first;
}

/** Numbers per Gauss point in `radial` and `axial`. */
const PER_POINT = 7;

/** Gauss points per element: 3 in z by 3 in r, z slowest. Permeability is kept at each of them. */
export const POINTS_PER_ELEMENT = 9;

function pointTable(edges: Float64Array, radial: boolean): Float64Array {
  const count = edges.length - 1;
  const out = new Float64Array(count * 3 * PER_POINT);
  const s = new Float64Array(6);
  for (let k = 0; k < count; k++) {
    const a = edges[k] as number;
    const half = 0.5 * ((edges[k + 1] as number) - a);
    for (let q = 0; q < 3; q++) {
      const t = gauss3.x[q] as number;
      shape(t, s);
      const x = a + half * (1 + t);
      const at = (3 * k + q) * PER_POINT;
      for (let i = 0; i < 3; i++) {
        out[at + i] = s[i] as number;
        out[at + 3 + i] = (s[3 + i] as number) / half + (radial ? (s[i] as number) / x : 0);
      }
      out[at + 6] = (gauss3.w[q] as number) * half * (radial ? x : 1);
    }
  }
  return out;
}

/** Element whose interval holds x (edges ascending), clamped. */
function find(edges: Float64Array, x: number): number {
  let low = 0;
  let high = edges.length - 2;
  while (low < high) {
    const mid = (low + high + 1) >> 1;
    if ((edges[mid] as number) <= x) low = mid;
    else high = mid - 1;
  }
  return low;
}

/**
 * B = ∮ φ_i L_a r dl: each panel split at the grid lines, 4-point Gauss per piece with the panel's own
 * basis. (Lumping K at the nodes would falsify the power while the balance still closed.)
 */
function couplingOf(
  b: Boundary,
  body: Body,
  e: LoadElements,
  column: Int32Array,
  columns: number,
): SparseColumns {
  const sums: Map<number, number>[] = Array.from({ length: columns }, () => new Map());
  const nodes = gaussLegendre(b.order).x;
  const gauss = gaussLegendre(4);
  const phi = new Float64Array(b.order);
  const s = new Float64Array(6);
  const nnr = 2 * e.nr + 1;
  for (const panel of body.panels) {
    const alongZ = panel.hr === 0;
    const edges = alongZ ? e.grid.z : e.grid.r;
    const mid = alongZ ? panel.z : panel.r;
    const half = alongZ ? panel.hz : panel.hr;
    const fixed = alongZ ? fixedNode(e.grid.r, panel.r, 2) : fixedNode(e.grid.z, panel.z, 2);
    if (fixed < 0) continue;
    const stops = pieces(panel, edges, mid, half);
    for (let k = 0; k + 1 < stops.length; k++) {
      const t0 = stops[k] as number;
      const t1 = stops[k + 1] as number;
      if (t1 - t0 < 1e-12) continue;
      const middle = mid + half * 0.5 * (t0 + t1);
      const element = find(edges, middle);
      const e0 = edges[element] as number;
      const eh = 0.5 * ((edges[element + 1] as number) - e0);
      for (let q = 0; q < 4; q++) {
        const t = t0 + 0.5 * (t1 - t0) * (1 + (gauss.x[q] as number));
        const x = mid + half * t;
        const r = alongZ ? panel.r : x;
        const w = 0.5 * (t1 - t0) * (gauss.w[q] as number) * (panel.length / 2) * r;
        lagrange(nodes, t, phi);
        shape((x - e0) / eh - 1, s);
        for (let a = 0; a < 3; a++) {
          const along = 2 * element + a;
          const node = e.index[alongZ ? along * nnr + fixed : fixed * nnr + along] as number;
          if (node < 0) continue;
          for (let i = 0; i < b.order; i++) {
            const into = sums[column[panel.start + i] as number];
            if (into === undefined) continue;
            into.set(node, (into.get(node) ?? 0) + w * (s[a] as number) * (phi[i] as number));
          }
        }
      }
    }
  }
  return fromMaps(sums);
}

/** Tensor node number of a coordinate that lies on an outer edge of the grid; −1 when it does not. */
function fixedNode(edges: Float64Array, x: number, per: number): number {
  const last = edges.length - 1;
  const scale = (edges[last] as number) - (edges[0] as number);
  if (Math.abs(x - (edges[0] as number)) < 1e-9 * scale) return 0;
  if (Math.abs(x - (edges[last] as number)) < 1e-9 * scale) return per * last;
  return -1;
}

/** Parameters t at which a panel crosses grid lines, within the grid, ascending. */
function pieces(panel: Panel, edges: Float64Array, mid: number, half: number): number[] {
  const low = edges[0] as number;
  const high = edges[edges.length - 1] as number;
  const clamp = (x: number) => Math.min(1, Math.max(-1, (x - mid) / half));
  const ends = [clamp(low), clamp(high)].sort((p, q) => p - q);
  const t0 = ends[0] as number;
  const t1 = ends[1] as number;
  if (t1 - t0 < 1e-12) return [];
  const stops = [t0, t1];
  for (const edge of edges) {
    const t = (edge - mid) / half;
    if (t > t0 + 1e-12 && t < t1 - 1e-12) stops.push(t);
  }
  return stops.sort((p, q) => p - q);
}

function evaluationOf(b: Boundary, e: LoadElements, kept: ArrayLike<number>): SparseColumns {
  const rows: Int32Array[] = [];
  const values: Float64Array[] = [];
  const sr = new Float64Array(6);
  const sz = new Float64Array(6);
  const nnr = 2 * e.nr + 1;
  for (let k = 0; k < kept.length; k++) {
    const node = kept[k] as number;
    const r = b.r[node] as number;
    const z = b.z[node] as number;
    const ir = find(e.grid.r, r);
    const iz = find(e.grid.z, z);
    local(e.grid.r, ir, r, sr);
    local(e.grid.z, iz, z, sz);
    const at: number[] = [];
    const value: number[] = [];
    for (let a = 0; a < 3; a++) {
      for (let i = 0; i < 3; i++) {
        const v = (sz[a] as number) * (sr[i] as number);
        const free = e.index[(2 * iz + a) * nnr + 2 * ir + i] as number;
        if (free >= 0 && Math.abs(v) > 1e-14) {
          at.push(free);
          value.push(v);
        }
      }
    }
    rows.push(Int32Array.from(at));
    values.push(Float64Array.from(value));
  }
  return { cols: kept.length, rows, values };
}

function local(edges: Float64Array, element: number, x: number, out: Float64Array): void {
  const a = edges[element] as number;
  const half = 0.5 * ((edges[element + 1] as number) - a);
  shape(Math.min(1, Math.max(-1, (x - a) / half - 1)), out);
}

function fromMaps(sums: Map<number, number>[]): SparseColumns {
  const rows: Int32Array[] = [];
  const values: Float64Array[] = [];
  for (const sum of sums) {
    const sorted = [...sum.entries()].sort((p, q) => p[0] - q[0]);
    rows.push(Int32Array.from(sorted.map((x) => x[0])));
    values.push(Float64Array.from(sorted.map((x) => x[1])));
  }
  return { cols: sums.length, rows, values };
}

/** The factored finite-element system of one material state. */
export interface LoadSolution {
  /** E at kept boundary nodes for unit K in each kept column. */
  z: ComplexMatrix;
  elements: LoadElements;
  factors: Skyline;
  omegaMu: number;
}

/**
 * Z = P·A⁻¹·(jωμ0 B) for resistivity per element (index iz·nr + ir) and permeability at its 9 Gauss points.
 * B and P touch surface nodes only and these are eliminated last: the inside is never solved for here.
 */
export function solveLoad(
  e: LoadElements,
  frequency: number,
  resistivity: Float64Array,
  permeability: Float64Array,
): LoadSolution {
  const a = skyline(e.first);
  stiffness(e, frequency, resistivity, permeability, a);
  factorSkyline(a);
  const cols = e.coupling.cols;
  const from = e.surface;
  const x = complexMatrix(e.nodes - from, cols);
  const omegaMu = 2 * Math.PI * frequency * MU0;
  for (let j = 0; j < cols; j++) {
    const at = e.coupling.rows[j] as Int32Array;
    const value = e.coupling.values[j] as Float64Array;
    for (let k = 0; k < at.length; k++)
      x.im[((at[k] as number) - from) * cols + j] = omegaMu * (value[k] as number);
  }
  solveSkyline(a, x, from);
  const z = complexMatrix(e.evaluation.cols, cols);
  for (let i = 0; i < e.evaluation.cols; i++) {
    const at = e.evaluation.rows[i] as Int32Array;
    const value = e.evaluation.values[i] as Float64Array;
    for (let k = 0; k < at.length; k++) {
      const v = value[k] as number;
      const row = ((at[k] as number) - from) * cols;
      for (let j = 0; j < cols; j++) {
        z.re[i * cols + j] = (z.re[i * cols + j] as number) + v * (x.re[row + j] as number);
        z.im[i * cols + j] = (z.im[i * cols + j] as number) + v * (x.im[row + j] as number);
      }
    }
  }
  return { z, elements: e, factors: a, omegaMu };
}

/** Adds every element's matrix. */
function stiffness(
  e: LoadElements,
  frequency: number,
  resistivity: Float64Array,
  permeability: Float64Array,
  into: Skyline,
): void {
  const omegaMu = 2 * Math.PI * frequency * MU0;
  const nnr = 2 * e.nr + 1;
  const free = new Int32Array(9);
  const kr9 = new Float64Array(81);
  const km9 = new Float64Array(81);
  const value = new Float64Array(9);
  const curl = new Float64Array(9);
  const slope = new Float64Array(9);
  for (let kz = 0; kz < e.nz; kz++) {
    for (let kr = 0; kr < e.nr; kr++) {
      const element = kz * e.nr + kr;
      const sigma = omegaMu / (resistivity[element] as number);
      kr9.fill(0);
      km9.fill(0);
      for (let g = 0; g < POINTS_PER_ELEMENT; g++) {
        const at = (3 * kz + ((g / 3) | 0)) * PER_POINT;
        const ar = (3 * kr + (g % 3)) * PER_POINT;
        const weight = (e.axial[at + 6] as number) * (e.radial[ar + 6] as number);
        const nu = weight / (permeability[POINTS_PER_ELEMENT * element + g] as number);
        for (let p = 0; p < 9; p++) {
          const a = (p / 3) | 0;
          const i = p - 3 * a;
          const na = e.axial[at + a] as number;
          const ni = e.radial[ar + i] as number;
          value[p] = na * ni;
          curl[p] = na * (e.radial[ar + 3 + i] as number);
          slope[p] = (e.axial[at + 3 + a] as number) * ni;
        }
        for (let p = 0; p < 9; p++) {
          const cp = nu * (curl[p] as number);
          const sp = nu * (slope[p] as number);
          const vp = weight * sigma * (value[p] as number);
          for (let q = 0; q <= p; q++) {
            const k = 9 * p + q;
            kr9[k] = (kr9[k] as number) + cp * (curl[q] as number) + sp * (slope[q] as number);
            km9[k] = (km9[k] as number) + vp * (value[q] as number);
          }
        }
      }
      for (let a = 0; a < 3; a++) {
        for (let i = 0; i < 3; i++) free[3 * a + i] = e.index[(2 * kz + a) * nnr + 2 * kr + i] as number;
      }
      for (let p = 0; p < 9; p++) {
        for (let q = 0; q <= p; q++) {
          const f = free[p] as number;
          const h = free[q] as number;
          if (f < 0 || h < 0) continue;
          addEntry(into, f, h, kr9[9 * p + q] as number, km9[9 * p + q] as number);
        }
      }
    }
  }
}

/** E at the free nodes for boundary currents K (kept columns): one solution with the factors at hand. */
export function nodeFields(solution: LoadSolution, k: ComplexVector): ComplexVector {
  const { elements: e, factors, omegaMu } = solution;
  const x = complexMatrix(e.nodes, 1);
  for (let j = 0; j < e.coupling.cols; j++) {
    const at = e.coupling.rows[j] as Int32Array;
    const value = e.coupling.values[j] as Float64Array;
    for (let i = 0; i < at.length; i++) {
      const node = at[i] as number;
      const v = omegaMu * (value[i] as number);
      x.re[node] = (x.re[node] as number) - v * (k.im[j] as number);
      x.im[node] = (x.im[node] as number) + v * (k.re[j] as number);
    }
  }
  solveSkyline(factors, x);
  return { re: x.re, im: x.im };
}

/**
 * |H| rms at the Gauss points of each element, A/m, from node fields E; H = curl E/(−jωμ).
 * Order as the permeability: 9 per element, element iz·nr + ir.
 */
export function pointFields(
  e: LoadElements,
  frequency: number,
  permeability: Float64Array,
  field: ComplexVector,
): Float64Array {
  const out = new Float64Array(POINTS_PER_ELEMENT * e.nr * e.nz);
  const nnr = 2 * e.nr + 1;
  for (let kz = 0; kz < e.nz; kz++) {
    for (let kr = 0; kr < e.nr; kr++) {
      for (let g = 0; g < POINTS_PER_ELEMENT; g++) {
        const at = (3 * kz + ((g / 3) | 0)) * PER_POINT;
        const ar = (3 * kr + (g % 3)) * PER_POINT;
        let cr = 0;
        let ci = 0;
        let zr = 0;
        let zi = 0;
        for (let a = 0; a < 3; a++) {
          for (let i = 0; i < 3; i++) {
            const node = e.index[(2 * kz + a) * nnr + 2 * kr + i] as number;
            if (node < 0) continue;
            const er = field.re[node] as number;
            const ei = field.im[node] as number;
            const curl = (e.axial[at + a] as number) * (e.radial[ar + 3 + i] as number);
            const dz = (e.axial[at + 3 + a] as number) * (e.radial[ar + i] as number);
            cr += curl * er;
            ci += curl * ei;
            zr += dz * er;
            zi += dz * ei;
          }
        }
        const k = POINTS_PER_ELEMENT * (kz * e.nr + kr) + g;
        const scale = 1 / (2 * Math.PI * frequency * MU0 * (permeability[k] as number));
        out[k] = Math.sqrt(cr * cr + ci * ci + zr * zr + zi * zi) * scale;
      }
    }
  }
  return out;
}
