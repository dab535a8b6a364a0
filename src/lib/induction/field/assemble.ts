import type { Body, Boundary, Panel } from './boundary.ts';
import { point, pointOn } from './boundary.ts';
import { cubicRule, gaussLegendre, lagrange, type Rule } from './quadrature.ts';
import { ringKernel, ringKernelOut } from './ring-kernel.ts';

/**
 * Geometry matrices of the boundary equation, rows = target nodes, columns = source nodes, row-major:
 * S_ij = ∮ F(P_i, Q) φ_j dl, D_ij = ∮ ∂F/∂n_c(P_i, Q) φ_j dl, φ_j the interpolation basis of node j.
 * Real, dependent on geometry alone: assembled once for all frequencies, materials and temperatures.
 */
export interface GeometryMatrices {
  rows: number;
  cols: number;
  s: Float64Array;
  d: Float64Array;
}

/** Far rule of a round tube holds when M·ln(1 + d/a) exceeds this (trapezoid error about 1e-5). */
const FAR_ROUND = 11.5;
/** Far rule of a panel: distance above this many panel lengths. */
const FAR_PANEL = 1.5;

/** Points of the near rule by nodes per round tube. */
export function nearOrder(nodesPerRound: number): number {
  if (nodesPerRound <= 16) return 20;
  return nodesPerRound <= 32 ? 28 : 40;
}

const basis = new Float64Array(64);

/**
 * One block: all nodes of `target` against all nodes of `source`, written to s and d (row-major,
 * `source.count` columns, from row 0). `rows` lists the target nodes wanted (boundary numbering).
 */
export function assembleBlock(
  b: Boundary,
  rows: ArrayLike<number>,
  source: Body,
  near: number,
  s: Float64Array,
  d: Float64Array,
): void {
  const cols = source.count;
  for (let i = 0; i < rows.length; i++) {
    const node = rows[i] as number;
    const offset = i * cols;
    if (source.round !== null) roundRow(b, node, source, near, s, d, offset);
    else {
      for (const panel of source.panels) {
        panelRow(b, node, panel, near, s, d, offset + panel.start - source.start);
      }
    }
  }
}

function roundRow(
  b: Boundary,
  node: number,
  source: Body,
  near: number,
  s: Float64Array,
  d: Float64Array,
  offset: number,
): void {
  const circle = source.round;
  if (circle === null) return;
  const m = source.count;
  const rP = b.r[node] as number;
  const zP = b.z[node] as number;
  const dr = rP - circle.r;
  const dz = zP - circle.z;
  const away = Math.abs(Math.hypot(dr, dz) - circle.a);
  const { a } = circle;
  if (m * Math.log(1 + away / a) > FAR_ROUND) {
    const w = (2 * Math.PI * a) / m;
    for (let j = 0; j < m; j++) {
      const k = source.start + j;
      ringKernel(rP, zP, b.r[k] as number, b.z[k] as number, b.nr[k] as number, b.nz[k] as number);
      s[offset + j] = (ringKernelOut[0] as number) * w;
      d[offset + j] = (ringKernelOut[1] as number) * w;
    }
    return;
  }
  const rule = cubicRule(near);
  const star = Math.atan2(dz, dr);
  for (let j = 0; j < m; j++) {
    s[offset + j] = 0;
    d[offset + j] = 0;
  }
  for (let side = -1; side <= 1; side += 2) {
    for (let q = 0; q < near; q++) {
      const theta = star + side * Math.PI * (rule.x[q] as number);
      const c = Math.cos(theta);
      const sn = Math.sin(theta);
      const w = Math.PI * a * (rule.w[q] as number);
      ringKernel(rP, zP, circle.r + a * c, circle.z + a * sn, c, sn);
      const f = (ringKernelOut[0] as number) * w;
      const g = (ringKernelOut[1] as number) * w;
      trigonometricBasis(m, theta);
      for (let j = 0; j < m; j++) {
        const phi = basis[j] as number;
        s[offset + j] = (s[offset + j] as number) + f * phi;
        d[offset + j] = (d[offset + j] as number) + g * phi;
      }
    }
  }
}

/** Trigonometric cardinal basis of m (even) equispaced angles at θ, left in `basis`. */
function trigonometricBasis(m: number, theta: number): void {
  const top = Math.sin((m * theta) / 2) / m;
  for (let j = 0; j < m; j++) {
    const x = 0.5 * (theta - (2 * Math.PI * j) / m);
    const sn = Math.sin(x);
    if (Math.abs(sn) < 1e-9) basis[j] = 1;
    else basis[j] = ((j % 2 === 0 ? top : -top) * Math.cos(x)) / sn;
  }
}

const farBasisCache = new Map<number, { rule: Rule; values: Float64Array }>();

function farBasis(order: number): { rule: Rule; values: Float64Array } {
  const known = farBasisCache.get(order);
  if (known !== undefined) return known;
  const count = Math.max(order, 4);
  const rule = gaussLegendre(count);
  const nodes = gaussLegendre(order).x;
  const values = new Float64Array(count * order);
  const row = new Float64Array(order);
  for (let q = 0; q < count; q++) {
    lagrange(nodes, rule.x[q] as number, row);
    values.set(row, q * order);
  }
  const made = { rule, values };
  farBasisCache.set(order, made);
  return made;
}

function panelRow(
  b: Boundary,
  node: number,
  panel: Panel,
  near: number,
  s: Float64Array,
  d: Float64Array,
  offset: number,
): void {
  const order = b.order;
  const rP = b.r[node] as number;
  const zP = b.z[node] as number;
  const star = closest(panel, rP, zP);
  pointOn(panel, star);
  const away = Math.hypot(rP - (point[0] as number), zP - (point[1] as number));
  const half = panel.length / 2;
  for (let j = 0; j < order; j++) {
    s[offset + j] = 0;
    d[offset + j] = 0;
  }
  if (away > FAR_PANEL * panel.length) {
    const far = farBasis(order);
    for (let q = 0; q < far.rule.x.length; q++) {
      pointOn(panel, far.rule.x[q] as number);
      const w = half * (far.rule.w[q] as number);
      ringKernel(rP, zP, point[0] as number, point[1] as number, point[2] as number, point[3] as number);
      const f = (ringKernelOut[0] as number) * w;
      const g = (ringKernelOut[1] as number) * w;
      for (let j = 0; j < order; j++) {
        const phi = far.values[q * order + j] as number;
        s[offset + j] = (s[offset + j] as number) + f * phi;
        d[offset + j] = (d[offset + j] as number) + g * phi;
      }
    }
    return;
  }
  const rule = cubicRule(near);
  const nodes = gaussLegendre(order).x;
  for (let side = -1; side <= 1; side += 2) {
    const reach = side < 0 ? 1 + star : 1 - star;
    if (reach < 1e-12) continue;
    for (let q = 0; q < near; q++) {
      const t = star + side * reach * (rule.x[q] as number);
      pointOn(panel, t);
      const w = half * reach * (rule.w[q] as number);
      ringKernel(rP, zP, point[0] as number, point[1] as number, point[2] as number, point[3] as number);
      const f = (ringKernelOut[0] as number) * w;
      const g = (ringKernelOut[1] as number) * w;
      lagrange(nodes, t, basis);
      for (let j = 0; j < order; j++) {
        const phi = basis[j] as number;
        s[offset + j] = (s[offset + j] as number) + f * phi;
        d[offset + j] = (d[offset + j] as number) + g * phi;
      }
    }
  }
}

/** Parameter of the point of a panel closest to (r, z), clamped to the panel. */
function closest(panel: Panel, r: number, z: number): number {
  if (panel.radius === 0) {
    const t =
      ((r - panel.r) * panel.hr + (z - panel.z) * panel.hz) / (panel.hr * panel.hr + panel.hz * panel.hz);
    return Math.min(1, Math.max(-1, t));
  }
  let angle = Math.atan2(z - panel.z, r - panel.r) - panel.midAngle;
  angle -= 2 * Math.PI * Math.round(angle / (2 * Math.PI));
  return Math.min(1, Math.max(-1, angle / panel.halfAngle));
}
