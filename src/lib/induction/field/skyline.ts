import type { ComplexMatrix } from './complex-dense.ts';

/**
 * Complex symmetric matrix in skyline storage: row i holds columns first[i] … i at
 * offset[i] + (column − first[i]); only the lower triangle is kept.
 */
export interface Skyline {
  n: number;
  first: Int32Array;
  offset: Int32Array;
  re: Float64Array;
  im: Float64Array;
}

/** Empty skyline for rows that reach back to `first[i]` ≤ i. */
export function skyline(first: Int32Array): Skyline {
  const n = first.length;
  const offset = new Int32Array(n);
  let total = 0;
  for (let i = 0; i < n; i++) {
    offset[i] = total;
    total += i - (first[i] as number) + 1;
  }
  return { n, first, offset, re: new Float64Array(total), im: new Float64Array(total) };
}

/** Adds to entry (i, j) of the symmetric matrix, whichever side of the diagonal. */
export function addEntry(a: Skyline, i: number, j: number, re: number, im: number): void {
  const row = i > j ? i : j;
  const k = (a.offset[row] as number) + (i > j ? j : i) - (a.first[row] as number);
  a.re[k] = (a.re[k] as number) + re;
  a.im[k] = (a.im[k] as number) + im;
}

/**
 * L·D·Lᵀ in place, without pivoting: safe for finite elements whose real and imaginary parts are positive
 * (semi)definite. L has a unit diagonal; 1/D is kept on the diagonal.
 * Source: Higham, Factorizing complex symmetric matrices with positive definite real and imaginary parts
 * (Math. Comp. 1998).
 */
export function factorSkyline(a: Skyline): void {
  const { n, first, offset, re, im } = a;
  let widest = 0;
  for (let i = 0; i < n; i++) widest = Math.max(widest, i - (first[i] as number));
  const vr = new Float64Array(widest + 1);
  const vi = new Float64Array(widest + 1);
  for (let i = 0; i < n; i++) {
    const fi = first[i] as number;
    const ri = (offset[i] as number) - fi;
    // v_j = L_ij·D_j, two columns at a time: the row's own values are then read once for both.
    let j = fi;
    for (; j + 1 < i; j += 2) {
      const fj = first[j] as number;
      const fk = first[j + 1] as number;
      const rj = (offset[j] as number) - fj;
      const rk = (offset[j + 1] as number) - fk;
      const both = Math.min(j, Math.max(fi, fj, fk));
      let sr = re[ri + j] as number;
      let si = im[ri + j] as number;
      let tr = re[ri + j + 1] as number;
      let ti = im[ri + j + 1] as number;
      for (let k = fj > fi ? fj : fi; k < both; k++) {
        const ar = vr[k - fi] as number;
        const ai = vi[k - fi] as number;
        const br = re[rj + k] as number;
        const bi = im[rj + k] as number;
        sr -= ar * br - ai * bi;
        si -= ar * bi + ai * br;
      }
      for (let k = fk > fi ? fk : fi; k < both; k++) {
        const ar = vr[k - fi] as number;
        const ai = vi[k - fi] as number;
        const cr = re[rk + k] as number;
        const ci = im[rk + k] as number;
        tr -= ar * cr - ai * ci;
        ti -= ar * ci + ai * cr;
      }
      for (let k = both; k < j; k++) {
        const ar = vr[k - fi] as number;
        const ai = vi[k - fi] as number;
        const br = re[rj + k] as number;
        const bi = im[rj + k] as number;
        const cr = re[rk + k] as number;
        const ci = im[rk + k] as number;
        sr -= ar * br - ai * bi;
        si -= ar * bi + ai * br;
        tr -= ar * cr - ai * ci;
        ti -= ar * ci + ai * cr;
      }
      vr[j - fi] = sr;
      vi[j - fi] = si;
      if (fk <= j) {
        const cr = re[rk + j] as number;
        const ci = im[rk + j] as number;
        tr -= sr * cr - si * ci;
        ti -= sr * ci + si * cr;
      }
      vr[j + 1 - fi] = tr;
      vi[j + 1 - fi] = ti;
    }
    if (j < i) {
      const fj = first[j] as number;
      const rj = (offset[j] as number) - fj;
      let sr = re[ri + j] as number;
      let si = im[ri + j] as number;
      for (let k = fj > fi ? fj : fi; k < j; k++) {
        const ar = vr[k - fi] as number;
        const ai = vi[k - fi] as number;
        const br = re[rj + k] as number;
        const bi = im[rj + k] as number;
        sr -= ar * br - ai * bi;
        si -= ar * bi + ai * br;
      }
      vr[j - fi] = sr;
      vi[j - fi] = si;
    }
    let dr = re[ri + i] as number;
    let di = im[ri + i] as number;
    for (j = fi; j < i; j++) {
      const ar = vr[j - fi] as number;
      const ai = vi[j - fi] as number;
      const dj = (offset[j] as number) + j - (first[j] as number);
      const qr = re[dj] as number;
      const qi = im[dj] as number;
      const lr = ar * qr - ai * qi;
      const li = ar * qi + ai * qr;
      re[ri + j] = lr;
      im[ri + j] = li;
      dr -= ar * lr - ai * li;
      di -= ar * li + ai * lr;
    }
    const d = dr * dr + di * di;
    re[ri + i] = dr / d;
    im[ri + i] = -di / d;
  }
}

/**
 * Solves with the factors for all columns of x, in place. With `from` > 0 only the last n − from rows: right
 * when the right-hand side is zero above them and only they are wanted (x then has n − from rows).
 */
export function solveSkyline(a: Skyline, x: ComplexMatrix, from = 0): void {
  const { n, first, offset, re, im } = a;
  const m = x.cols;
  const xr = x.re;
  const xi = x.im;
  for (let i = from; i < n; i++) {
    const fi = first[i] as number;
    const ri = (offset[i] as number) - fi;
    for (let k = fi > from ? fi : from; k < i; k++) {
      axpy(xr, xi, m, (i - from) * m, (k - from) * m, re[ri + k] as number, im[ri + k] as number);
    }
  }
  for (let i = from; i < n; i++) {
    const at = (offset[i] as number) + i - (first[i] as number);
    const qr = re[at] as number;
    const qi = im[at] as number;
    const row = (i - from) * m;
    for (let j = row; j < row + m; j++) {
      const r = xr[j] as number;
      const q = xi[j] as number;
      xr[j] = r * qr - q * qi;
      xi[j] = r * qi + q * qr;
    }
  }
  for (let i = n - 1; i >= from; i--) {
    const fi = first[i] as number;
    const ri = (offset[i] as number) - fi;
    for (let k = fi > from ? fi : from; k < i; k++) {
      axpy(xr, xi, m, (k - from) * m, (i - from) * m, re[ri + k] as number, im[ri + k] as number);
    }
  }
}

/** x[target] −= f·x[source] over m columns. */
function axpy(
  xr: Float64Array,
  xi: Float64Array,
  m: number,
  target: number,
  source: number,
  fr: number,
  fi: number,
): void {
  if (fr === 0 && fi === 0) return;
  for (let j = 0; j < m; j++) {
    const r = xr[source + j] as number;
    const q = xi[source + j] as number;
    xr[target + j] = (xr[target + j] as number) - (fr * r - fi * q);
    xi[target + j] = (xi[target + j] as number) - (fr * q + fi * r);
  }
}
