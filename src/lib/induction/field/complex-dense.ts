/** Dense complex matrix, row-major, real and imaginary parts apart (fast in V8, no allocation per entry). */
export interface ComplexMatrix {
  rows: number;
  cols: number;
  re: Float64Array;
  im: Float64Array;
}

export function complexMatrix(rows: number, cols: number): ComplexMatrix {
  return { rows, cols, re: new Float64Array(rows * cols), im: new Float64Array(rows * cols) };
}

/** Factors of a square complex matrix: P·A = L·U in place, `pivot[k]` = row swapped with row k. */
export interface ComplexFactors {
  n: number;
  lu: ComplexMatrix;
  pivot: Int32Array;
}

/** Columns eliminated together: a row stays in cache while it takes this many updates. */
const PANEL = 24;

/**
 * LU factorisation with partial pivoting, in place, a panel of columns at a time; the inner loop takes two
 * updates per pass over a row and allocates nothing. Returns null when the matrix is singular to working
 * precision.
 */
export function factorise(a: ComplexMatrix): ComplexFactors | null {
  const n = a.rows;
  const { re, im } = a;
  const pivot = new Int32Array(n);
  for (let k0 = 0; k0 < n; k0 += PANEL) {
    const k1 = Math.min(n, k0 + PANEL);
    for (let k = k0; k < k1; k++) {
      let best = -1;
      let row = k;
      for (let i = k; i < n; i++) {
        const xr = re[i * n + k] as number;
        const xi = im[i * n + k] as number;
        const size = xr * xr + xi * xi;
        if (size > best) {
          best = size;
          row = i;
        }
      }
      if (!(best > 0) || !Number.isFinite(best)) return null;
      pivot[k] = row;
      if (row !== k) swapRows(re, im, n, k, row);
      const kk = k * n + k;
      const pr = (re[kk] as number) / best;
      const pi = -(im[kk] as number) / best;
      for (let i = k + 1; i < n; i++) {
        const ik = i * n + k;
        const xr = re[ik] as number;
        const xi = im[ik] as number;
        const fr = xr * pr - xi * pi;
        const fi = xr * pi + xi * pr;
        re[ik] = fr;
        im[ik] = fi;
        const rowI = i * n;
        const rowK = k * n;
        for (let j = k + 1; j < k1; j++) {
          const yr = re[rowK + j] as number;
          const yi = im[rowK + j] as number;
          re[rowI + j] = (re[rowI + j] as number) - (fr * yr - fi * yi);
          im[rowI + j] = (im[rowI + j] as number) - (fr * yi + fi * yr);
        }
      }
    }
    if (k1 === n) break;
    for (let i = k0 + 1; i < k1; i++) eliminateRow(re, im, n, i, k0, i, k1);
    for (let i = k1; i < n; i++) eliminateRow(re, im, n, i, k0, k1, k1);
  }
  return { n, lu: a, pivot };
}

/** Row i −= Σ over k from `from` to `to` of L_ik·(row k), columns `first` … n − 1; two k per pass. */
function eliminateRow(
  re: Float64Array,
  im: Float64Array,
  n: number,
  i: number,
  from: number,
  to: number,
  first: number,
): void {
  const row = i * n;
  let k = from;
  for (; k + 1 < to; k += 2) {
    const ar = re[row + k] as number;
    const ai = im[row + k] as number;
    const br = re[row + k + 1] as number;
    const bi = im[row + k + 1] as number;
    const p = k * n;
    const q = p + n;
    for (let j = first; j < n; j++) {
      const xr = re[p + j] as number;
      const xi = im[p + j] as number;
      const yr = re[q + j] as number;
      const yi = im[q + j] as number;
      re[row + j] = (re[row + j] as number) - (ar * xr - ai * xi) - (br * yr - bi * yi);
      im[row + j] = (im[row + j] as number) - (ar * xi + ai * xr) - (br * yi + bi * yr);
    }
  }
  if (k < to) {
    const ar = re[row + k] as number;
    const ai = im[row + k] as number;
    const p = k * n;
    for (let j = first; j < n; j++) {
      const xr = re[p + j] as number;
      const xi = im[p + j] as number;
      re[row + j] = (re[row + j] as number) - (ar * xr - ai * xi);
      im[row + j] = (im[row + j] as number) - (ar * xi + ai * xr);
    }
  }
}

function swapRows(re: Float64Array, im: Float64Array, cols: number, a: number, b: number): void {
  const p = a * cols;
  const q = b * cols;
  for (let j = 0; j < cols; j++) {
    const r = re[p + j] as number;
    re[p + j] = re[q + j] as number;
    re[q + j] = r;
    const i = im[p + j] as number;
    im[p + j] = im[q + j] as number;
    im[q + j] = i;
  }
}

/** Solves A·X = B for all columns of B, in place (B becomes X). */
export function solveFactored(f: ComplexFactors, b: ComplexMatrix): void {
  const { n, lu, pivot } = f;
  const m = b.cols;
  const { re, im } = b;
  for (let k = 0; k < n; k++) {
    const row = pivot[k] as number;
    if (row !== k) swapRows(re, im, m, k, row);
  }
  for (let i = 1; i < n; i++) {
    const ri = i * m;
    for (let k = 0; k < i; k++)
      subtractRow(re, im, m, ri, k * m, lu.re[i * n + k] as number, lu.im[i * n + k] as number);
  }
  for (let i = n - 1; i >= 0; i--) {
    const ri = i * m;
    for (let k = i + 1; k < n; k++) {
      subtractRow(re, im, m, ri, k * m, lu.re[i * n + k] as number, lu.im[i * n + k] as number);
    }
    const dr = lu.re[i * n + i] as number;
    const di = lu.im[i * n + i] as number;
    const d = dr * dr + di * di;
    const qr = dr / d;
    const qi = -di / d;
    for (let j = 0; j < m; j++) {
      const xr = re[ri + j] as number;
      const xi = im[ri + j] as number;
      re[ri + j] = xr * qr - xi * qi;
      im[ri + j] = xr * qi + xi * qr;
    }
  }
}

function subtractRow(
  re: Float64Array,
  im: Float64Array,
  m: number,
  target: number,
  source: number,
  fr: number,
  fi: number,
): void {
  if (fr === 0 && fi === 0) return;
  for (let j = 0; j < m; j++) {
    const yr = re[source + j] as number;
    const yi = im[source + j] as number;
    re[target + j] = (re[target + j] as number) - (fr * yr - fi * yi);
    im[target + j] = (im[target + j] as number) - (fr * yi + fi * yr);
  }
}

/** out += factor·A·B, with the real factor `factor`. */
export function addProduct(out: ComplexMatrix, a: ComplexMatrix, b: ComplexMatrix, factor: number): void {
  const m = b.cols;
  for (let i = 0; i < a.rows; i++) {
    for (let k = 0; k < a.cols; k++) {
      const fr = factor * (a.re[i * a.cols + k] as number);
      const fi = factor * (a.im[i * a.cols + k] as number);
      addRow(out, b, i * out.cols, k * m, m, fr, fi);
    }
  }
}

function addRow(
  out: ComplexMatrix,
  b: ComplexMatrix,
  target: number,
  source: number,
  m: number,
  fr: number,
  fi: number,
): void {
  if (fr === 0 && fi === 0) return;
  const { re, im } = out;
  for (let j = 0; j < m; j++) {
    const yr = b.re[source + j] as number;
    const yi = b.im[source + j] as number;
    re[target + j] = (re[target + j] as number) + fr * yr - fi * yi;
    im[target + j] = (im[target + j] as number) + fr * yi + fi * yr;
  }
}

/** A·x for a complex vector given and returned as [re, im]. */
export function timesVector(a: ComplexMatrix, x: ComplexVector): ComplexVector {
  const re = new Float64Array(a.rows);
  const im = new Float64Array(a.rows);
  for (let i = 0; i < a.rows; i++) {
    let sr = 0;
    let si = 0;
    for (let j = 0; j < a.cols; j++) {
      const ar = a.re[i * a.cols + j] as number;
      const ai = a.im[i * a.cols + j] as number;
      sr += ar * (x.re[j] as number) - ai * (x.im[j] as number);
      si += ar * (x.im[j] as number) + ai * (x.re[j] as number);
    }
    re[i] = sr;
    im[i] = si;
  }
  return { re, im };
}

export interface ComplexVector {
  re: Float64Array;
  im: Float64Array;
}
