import { MU0 } from '../constants/physical.ts';
import { InductionInputError } from '../input-error.ts';
import {
  addProduct,
  complexMatrix,
  factorise,
  solveFactored,
  timesVector,
  type ComplexFactors,
  type ComplexMatrix,
  type ComplexVector,
} from './complex-dense.ts';
import type { FieldGeometry, KeptTurn } from './field-geometry.ts';
import { rectangularTubeOperator } from './rectangular-tube-operator.ts';
import { roundTubeOperator } from './tube-operator.ts';

/**
 * The coil at one frequency and copper resistivity, parts eliminated to the right-hand side.
 * Rows are the boundary equation divided by ω·μ0; voltages are scaled with it.
 */
export interface CoilBlock {
  geometry: FieldGeometry;
  frequency: number;
  /** Interior operators of the kept turns (kept rows × kept columns). */
  turnOperators: ComplexMatrix[];
  /** Factored [[X_tt + Y_tt·Z_t, −1], [wᵀ, 0]]. */
  factors: ComplexFactors;
  /** Solution without any part for 1 A: K of the kept turn nodes, then scaled voltages. */
  bare: ComplexVector;
  /** C = X_lt + Y_lt·Z_t: parts' rows against turn columns. */
  toParts: ComplexMatrix;
  /** Filled on demand for many load states. */
  updates: {
    wx: ComplexMatrix;
    wy: ComplexMatrix;
    x: ComplexMatrix;
    y: ComplexMatrix;
    b: ComplexVector;
  } | null;
}

/** Interior operators of all distinct sections: once per distinct ring radius. */
function operators(g: FieldGeometry, resistivity: number, frequency: number): ComplexMatrix[] {
  const cache = new Map<number, ComplexMatrix>();
  return g.turns.map((turn) => {
    const ring = g.coil.rings[turn.turn];
    const radius = ring === undefined ? 0 : ring.radius;
    const key = Math.round(radius * 1e10);
    let full = cache.get(key);
    if (full === undefined) {
      const section = g.section;
      full =
        section.kind === 'round'
          ? roundTubeOperator(turn.body.count, radius, section.radius, section.wall, resistivity, frequency)
          : rectangularTubeOperator(g.boundary, turn.body, section, resistivity, frequency);
      cache.set(key, full);
    }
    return turn.folded ? fold(full, turn, g) : full;
  });
}

/** Interior operator of a turn on the mirror plane: kept rows, mirrored columns added. */
function fold(full: ComplexMatrix, turn: KeptTurn, g: FieldGeometry): ComplexMatrix {
  const out = complexMatrix(turn.count, turn.count);
  const size = turn.body.count;
  for (let i = 0; i < turn.count; i++) {
    const row = ((g.kept[turn.start + i] as number) - turn.body.start) * size;
    for (let j = 0; j < size; j++) {
      const c = i * turn.count + (g.column[turn.body.start + j] as number) - turn.start;
      out.re[c] = (out.re[c] as number) + (full.re[row + j] as number);
      out.im[c] = (out.im[c] as number) + (full.im[row + j] as number);
    }
  }
  return out;
}

/** out[rows × cols of z] = j·S + Y·Z/(ωμ0) for a block of the geometry matrices. */
function withOperator(
  g: FieldGeometry,
  firstRow: number,
  rows: number,
  firstCol: number,
  z: ComplexMatrix,
  omegaMu: number,
  out: ComplexMatrix,
  outRow: number,
  outCol: number,
): void {
  const m = g.kept.length;
  const cols = z.cols;
  for (let i = 0; i < rows; i++) {
    const from = (firstRow + i) * m + firstCol;
    const into = (outRow + i) * out.cols + outCol;
    for (let j = 0; j < cols; j++)
      out.im[into + j] = (out.im[into + j] as number) + (g.sMatrix[from + j] as number);
    for (let k = 0; k < cols; k++) {
      const y = (g.yMatrix[from + k] as number) / omegaMu;
      const zk = k * cols;
      for (let j = 0; j < cols; j++) {
        out.re[into + j] = (out.re[into + j] as number) + y * (z.re[zk + j] as number);
        out.im[into + j] = (out.im[into + j] as number) + y * (z.im[zk + j] as number);
      }
    }
  }
}

/**
 * Assembles and factors the coil at one frequency.
 *
 * @param resistivity of the copper, Ω·m   @param frequency Hz, > 0
 */
export function coilBlock(g: FieldGeometry, resistivity: number, frequency: number): CoilBlock {
  const omegaMu = 2 * Math.PI * frequency * MU0;
  const nt = g.turnColumns;
  const nv = g.turns.length;
  const nl = g.kept.length - nt;
  const turnOperators = operators(g, resistivity, frequency);
  const a = complexMatrix(nt + nv, nt + nv);
  const toParts = complexMatrix(nl, nt);
  for (const [t, turn] of g.turns.entries()) {
    const z = turnOperators[t] as ComplexMatrix;
    withOperator(g, 0, nt, turn.start, z, omegaMu, a, 0, turn.start);
    if (nl > 0) withOperator(g, nt, nl, turn.start, z, omegaMu, toParts, 0, turn.start);
    for (let i = turn.start; i < turn.start + turn.count; i++) {
      a.re[i * a.cols + nt + t] = -1;
      const count = turn.folded ? (g.multiplicity[i] as number) : 1;
      // Scaled by the mean ring length to keep rows of one size; the right-hand side scales alike.
      a.re[(nt + t) * a.cols + i] = count * (g.boundary.w[g.kept[i] as number] as number);
    }
  }
  const factors = factorise(a);
  if (factors === null) throw singular();
  const one = complexMatrix(nt + nv, 1);
  for (let t = 0; t < nv; t++) one.re[nt + t] = 1;
  solveFactored(factors, one);
  return {
    geometry: g,
    frequency,
    turnOperators,
    factors,
    bare: { re: one.re, im: one.im },
    toParts,
    updates: null,
  };
}

function singular(): InductionInputError {
  return new InductionInputError(
    'not-converged',
    'coil',
    'The field equations have no stable solution for this geometry.',
  );
}

/** Real geometry block as a complex matrix: j·S or Y/(ωμ0). */
function geometryBlock(
  g: FieldGeometry,
  which: 'x' | 'y',
  omegaMu: number,
  firstRow: number,
  rows: number,
  firstCol: number,
  cols: number,
  extraRows: number,
): ComplexMatrix {
  const m = g.kept.length;
  const out = complexMatrix(rows + extraRows, cols);
  for (let i = 0; i < rows; i++) {
    for (let j = 0; j < cols; j++) {
      const at = (firstRow + i) * m + firstCol + j;
      if (which === 'x') out.im[i * cols + j] = g.sMatrix[at] as number;
      else out.re[i * cols + j] = (g.yMatrix[at] as number) / omegaMu;
    }
  }
  return out;
}

/** Precomputes the Schur complement in the form X' + Y'·Z_l, for many states of the parts. */
export function prepareUpdates(block: CoilBlock): void {
  if (block.updates !== null) return;
  const g = block.geometry;
  const omegaMu = 2 * Math.PI * block.frequency * MU0;
  const nt = g.turnColumns;
  const nv = g.turns.length;
  const nl = g.kept.length - nt;
  const wx = geometryBlock(g, 'x', omegaMu, 0, nt, nt, nl, nv);
  const wy = geometryBlock(g, 'y', omegaMu, 0, nt, nt, nl, nv);
  solveFactored(block.factors, wx);
  solveFactored(block.factors, wy);
  const x = geometryBlock(g, 'x', omegaMu, nt, nl, nt, nl, 0);
  const y = geometryBlock(g, 'y', omegaMu, nt, nl, nt, nl, 0);
  addProduct(x, block.toParts, firstRows(wx, nt), -1);
  addProduct(y, block.toParts, firstRows(wy, nt), -1);
  block.updates = { wx, wy, x, y, b: rightHandSide(block) };
}

function firstRows(a: ComplexMatrix, rows: number): ComplexMatrix {
  return { rows, cols: a.cols, re: a.re.subarray(0, rows * a.cols), im: a.im.subarray(0, rows * a.cols) };
}

function rightHandSide(block: CoilBlock): ComplexVector {
  const nt = block.geometry.turnColumns;
  const head = { re: block.bare.re.subarray(0, nt), im: block.bare.im.subarray(0, nt) };
  const b = timesVector(block.toParts, head);
  for (let i = 0; i < b.re.length; i++) {
    b.re[i] = -(b.re[i] as number);
    b.im[i] = -(b.im[i] as number);
  }
  return b;
}

/** Fields for 1 A rms: boundary currents of kept nodes and turn voltages, and what follows from them. */
export interface FieldSolution {
  /** Impedance of all turns in series, Ω. */
  resistance: number;
  reactance: number;
  /** Complex voltage of every turn for 1 A, V. */
  turnVoltage: { re: number; im: number }[];
  /** Loss in each turn for 1 A, W. */
  turnPower: number[];
  /** Power into each part for 1 A, W. */
  partPower: number[];
  /** (Σ powers)/R − 1: resolved when below 1e-4. */
  balance: number;
  /** K at kept nodes, A/m, and E there, V/m. */
  k: ComplexVector;
  e: ComplexVector;
}

/**
 * Solves for given interior operators of the parts (in the order of `geometry.loads`); an empty list with
 * a geometry without parts gives the bare coil. Exact elimination, no iteration.
 */
export function solveField(block: CoilBlock, partOperators: ComplexMatrix[]): FieldSolution {
  const g = block.geometry;
  const nt = g.turnColumns;
  const nv = g.turns.length;
  const nl = g.kept.length - nt;
  const k = { re: new Float64Array(nt + nl), im: new Float64Array(nt + nl) };
  const turns: ComplexVector = { re: block.bare.re.slice(), im: block.bare.im.slice() };
  if (nl > 0) {
    const kl =
      block.updates === null
        ? eliminateOnce(block, partOperators, turns)
        : eliminatePrepared(block, partOperators, turns);
    k.re.set(kl.re, nt);
    k.im.set(kl.im, nt);
  }
  k.re.set(turns.re.subarray(0, nt), 0);
  k.im.set(turns.im.subarray(0, nt), 0);
  return outcome(block, partOperators, k, {
    re: turns.re.subarray(nt, nt + nv),
    im: turns.im.subarray(nt, nt + nv),
  });
}

function eliminateOnce(block: CoilBlock, z: ComplexMatrix[], turns: ComplexVector): ComplexVector {
  const g = block.geometry;
  const omegaMu = 2 * Math.PI * block.frequency * MU0;
  const nt = g.turnColumns;
  const nv = g.turns.length;
  const nl = g.kept.length - nt;
  const w = complexMatrix(nt + nv, nl);
  const a = complexMatrix(nl, nl);
  for (const [q, load] of g.loads.entries()) {
    const zl = z[q] as ComplexMatrix;
    withOperator(g, 0, nt, load.start, zl, omegaMu, w, 0, load.start - nt);
    withOperator(g, nt, nl, load.start, zl, omegaMu, a, 0, load.start - nt);
  }
  solveFactored(block.factors, w);
  addProduct(a, block.toParts, firstRows(w, nt), -1);
  const factors = factorise(a);
  if (factors === null) throw singular();
  const b = rightHandSide(block);
  const x: ComplexMatrix = { rows: nl, cols: 1, re: b.re, im: b.im };
  solveFactored(factors, x);
  subtract(turns, timesVector(w, x));
  return x;
}

function eliminatePrepared(block: CoilBlock, z: ComplexMatrix[], turns: ComplexVector): ComplexVector {
  const g = block.geometry;
  const up = block.updates;
  const nt = g.turnColumns;
  const nl = g.kept.length - nt;
  if (up === null) throw singular();
  const a: ComplexMatrix = { rows: nl, cols: nl, re: up.x.re.slice(), im: up.x.im.slice() };
  for (const [q, load] of g.loads.entries()) addBlockProduct(a, up.y, z[q] as ComplexMatrix, load.start - nt);
  const factors = factorise(a);
  if (factors === null) throw singular();
  const x: ComplexMatrix = { rows: nl, cols: 1, re: up.b.re.slice(), im: up.b.im.slice() };
  solveFactored(factors, x);
  const e = surfaceFields(block, z, x);
  subtract(turns, timesVector(up.wx, x));
  subtract(turns, timesVector(up.wy, e));
  return x;
}

/** a[:, at…] += y[:, at…]·z. */
function addBlockProduct(a: ComplexMatrix, y: ComplexMatrix, z: ComplexMatrix, at: number): void {
  const n = a.cols;
  const m = z.cols;
  for (let i = 0; i < a.rows; i++) {
    const into = i * n + at;
    for (let k = 0; k < m; k++) {
      const yr = y.re[i * n + at + k] as number;
      const yi = y.im[i * n + at + k] as number;
      const zk = k * m;
      for (let j = 0; j < m; j++) {
        const zr = z.re[zk + j] as number;
        const zi = z.im[zk + j] as number;
        a.re[into + j] = (a.re[into + j] as number) + yr * zr - yi * zi;
        a.im[into + j] = (a.im[into + j] as number) + yr * zi + yi * zr;
      }
    }
  }
}

/** E on the parts' surfaces from their K (both without the turns' part). */
function surfaceFields(block: CoilBlock, z: ComplexMatrix[], kl: ComplexVector): ComplexVector {
  const nt = block.geometry.turnColumns;
  const out = { re: new Float64Array(kl.re.length), im: new Float64Array(kl.re.length) };
  for (const [q, load] of block.geometry.loads.entries()) {
    const from = load.start - nt;
    const to = from + load.count;
    const e = timesVector(z[q] as ComplexMatrix, {
      re: kl.re.subarray(from, to),
      im: kl.im.subarray(from, to),
    });
    out.re.set(e.re, from);
    out.im.set(e.im, from);
  }
  return out;
}

function subtract(a: ComplexVector, b: ComplexVector): void {
  for (let i = 0; i < a.re.length; i++) {
    a.re[i] = (a.re[i] as number) - (b.re[i] as number);
    a.im[i] = (a.im[i] as number) - (b.im[i] as number);
  }
}

/** Power into a body, W for 1 A: Σ Re(E·K*)·w·2πr over kept nodes with multiplicity; leaves E in `fields`. */
function bodyPower(
  g: FieldGeometry,
  z: ComplexMatrix,
  k: ComplexVector,
  start: number,
  count: number,
  own: boolean,
  fields: ComplexVector,
): number {
  const part = { re: k.re.subarray(start, start + count), im: k.im.subarray(start, start + count) };
  const e = timesVector(z, part);
  fields.re.set(e.re, start);
  fields.im.set(e.im, start);
  let sum = 0;
  for (let i = 0; i < count; i++) {
    const node = g.kept[start + i] as number;
    const times = own ? (g.multiplicity[start + i] as number) : 1;
    const p = (e.re[i] as number) * (part.re[i] as number) + (e.im[i] as number) * (part.im[i] as number);
    sum += times * p * (g.boundary.w[node] as number) * 2 * Math.PI * (g.boundary.r[node] as number);
  }
  return sum;
}

function outcome(
  block: CoilBlock,
  z: ComplexMatrix[],
  k: ComplexVector,
  voltages: ComplexVector,
): FieldSolution {
  const g = block.geometry;
  const omegaMu = 2 * Math.PI * block.frequency * MU0;
  const count = g.coil.rings.length;
  const e = { re: new Float64Array(g.kept.length), im: new Float64Array(g.kept.length) };
  const turnVoltage = Array.from({ length: count }, () => ({ re: 0, im: 0 }));
  const turnPower = new Array<number>(count).fill(0);
  for (const [t, turn] of g.turns.entries()) {
    const v = { re: (voltages.re[t] as number) * omegaMu, im: (voltages.im[t] as number) * omegaMu };
    const p = bodyPower(
      g,
      block.turnOperators[t] as ComplexMatrix,
      k,
      turn.start,
      turn.count,
      turn.folded,
      e,
    );
    for (const at of turn.mirror >= 0 ? [turn.turn, turn.mirror] : [turn.turn]) {
      turnVoltage[at] = v;
      turnPower[at] = p;
    }
  }
  const partPower = g.loads.map((load, q) =>
    bodyPower(g, z[q] as ComplexMatrix, k, load.start, load.count, true, e),
  );
  const resistance = turnVoltage.reduce((sum, v) => sum + v.re, 0);
  const reactance = turnVoltage.reduce((sum, v) => sum + v.im, 0);
  const power = turnPower.reduce((sum, p) => sum + p, 0) + partPower.reduce((sum, p) => sum + p, 0);
  if (!Number.isFinite(resistance) || !Number.isFinite(reactance)) throw singular();
  return { resistance, reactance, turnVoltage, turnPower, partPower, balance: power / resistance - 1, k, e };
}
