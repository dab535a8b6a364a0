/**
 * An independent model of coils and parts from first principles, for tests only: every conductor is cut
 * into small rings of rectangular or sector section, each with uniform current; Z = R + jωM with Maxwell's
 * mutual inductance by Carlson's symmetric integrals (not the product's means) and the self-inductance of
 * a ring from its geometric mean distance. Turns in series: one voltage per turn, the currents of a turn's
 * filaments sum to 1 A; filaments of a part have no voltage.
 *
 * Error: of order (cell/skin depth)² in the resistance; with a third of a skin depth about 1 %.
 */
const MU0 = 4e-7 * Math.PI;

export interface Filament {
  r: number;
  z: number;
  area: number;
  /** Geometric mean distance of its section from itself, m. */
  gmd: number;
  resistivity: number;
  /** Turn it belongs to, −1 for a part. */
  turn: number;
}

/** Carlson's R_F by duplication. */
function carlsonRf(x0: number, y0: number, z0: number): number {
  let [x, y, z] = [x0, y0, z0];
  for (let k = 0; k < 60; k++) {
    const l = Math.sqrt(x * y) + Math.sqrt(y * z) + Math.sqrt(z * x);
    x = (x + l) / 4;
    y = (y + l) / 4;
    z = (z + l) / 4;
    const a = (x + y + z) / 3;
    if (Math.max(Math.abs(x - a), Math.abs(y - a), Math.abs(z - a)) < 1e-4 * a) {
      const dx = 1 - x / a;
      const dy = 1 - y / a;
      const dz = 1 - z / a;
      const e2 = dx * dy - dz * dz;
      const e3 = dx * dy * dz;
      return (1 - e2 / 10 + e3 / 14 + (e2 * e2) / 24 - (3 * e2 * e3) / 44) / Math.sqrt(a);
    }
  }
  return Number.NaN;
}

/** Carlson's R_D by duplication. */
function carlsonRd(x0: number, y0: number, z0: number): number {
  let [x, y, z] = [x0, y0, z0];
  let sum = 0;
  let factor = 1;
  for (let k = 0; k < 60; k++) {
    const l = Math.sqrt(x * y) + Math.sqrt(y * z) + Math.sqrt(z * x);
    sum += factor / (Math.sqrt(z) * (z + l));
    factor /= 4;
    x = (x + l) / 4;
    y = (y + l) / 4;
    z = (z + l) / 4;
    const a = (x + y + 3 * z) / 5;
    if (Math.max(Math.abs(x - a), Math.abs(y - a), Math.abs(z - a)) < 1e-4 * a) {
      const dx = 1 - x / a;
      const dy = 1 - y / a;
      const dz = 1 - z / a;
      const ea = dx * dy;
      const eb = dz * dz;
      const ec = ea - eb;
      const ed = ea - 6 * eb;
      const ee = ed + 2 * ec;
      const s =
        1 +
        ed * (-3 / 14 + (9 / 88) * ed - (4.5 / 26) * dz * ee) +
        dz * (ee / 6 + dz * ((-9 / 22) * ec + (3 / 26) * dz * ea));
      return 3 * sum + (factor * s) / (a * Math.sqrt(a));
    }
  }
  return Number.NaN;
}

/** Maxwell: M = μ0·√(ab)·[(2/k − k)·K − (2/k)·E], K and E by Carlson. */
export function circlesMutual(a: number, b: number, dz: number): number {
  const m = (4 * a * b) / ((a + b) ** 2 + dz * dz);
  const k = Math.sqrt(m);
  const rf = carlsonRf(0, 1 - m, 1);
  const e = rf - (m / 3) * carlsonRd(0, 1 - m, 1);
  return MU0 * Math.sqrt(a * b) * ((2 / k - k) * rf - (2 / k) * e);
}

/** Cells of a round tube or rod: sectors between layers graded from the outside. */
export function tubeCells(
  radius: number,
  z: number,
  a: number,
  wall: number,
  turn: number,
  resistivity: number,
  layers: number,
  sectors: number,
): Filament[] {
  const cells: Filament[] = [];
  const growth = 1.35;
  const first = (wall * (growth - 1)) / (growth ** layers - 1);
  let outer = a;
  for (let k = 0; k < layers; k++) {
    const inner = k === layers - 1 ? a - wall : outer - first * growth ** k;
    const mean = (2 / 3) * ((outer ** 3 - inner ** 3) / (outer ** 2 - inner ** 2));
    const chord = (2 * Math.PI * mean) / sectors;
    const area = (Math.PI * (outer ** 2 - inner ** 2)) / sectors;
    for (let s = 0; s < sectors; s++) {
      const angle = (2 * Math.PI * (s + 0.5)) / sectors;
      cells.push({
        r: radius + mean * Math.cos(angle),
        z: z + mean * Math.sin(angle),
        area,
        gmd: 0.2235 * (outer - inner + chord),
        resistivity,
        turn,
      });
    }
    outer = inner;
  }
  return cells;
}

/** Cells of a rectangle lowR…highR × lowZ…highZ, graded towards all four sides (not the axis). */
export function blockCells(
  box: { lowR: number; highR: number; lowZ: number; highZ: number },
  turn: number,
  resistivity: number,
  nr: number,
  nz: number,
): Filament[] {
  const graded = (low: number, high: number, n: number, oneSided: boolean) =>
    Array.from({ length: n + 1 }, (_, k) => {
      const s = k / n;
      const t = oneSided ? 1 - (1 - s) ** 2.2 : 0.5 * (1 - Math.cos(Math.PI * s));
      return low + (high - low) * t;
    });
  const rs = graded(box.lowR, box.highR, nr, box.lowR === 0);
  const zs = graded(box.lowZ, box.highZ, nz, false);
  const cells: Filament[] = [];
  for (let i = 0; i < nr; i++) {
    for (let j = 0; j < nz; j++) {
      const r0 = rs[i] ?? 0;
      const r1 = rs[i + 1] ?? 0;
      const z0 = zs[j] ?? 0;
      const z1 = zs[j + 1] ?? 0;
      const gmd = 0.2235 * (r1 - r0 + z1 - z0);
      cells.push({ r: (r0 + r1) / 2, z: (z0 + z1) / 2, area: (r1 - r0) * (z1 - z0), gmd, resistivity, turn });
    }
  }
  return cells;
}

export interface FilamentAnswer {
  inductance: number;
  resistance: number;
  load: number;
  unknowns: number;
}

/** Solves the filaments with their turns in series at 1 A. */
export function solveFilaments(cells: Filament[], turns: number, frequency: number): FilamentAnswer {
  const n = cells.length;
  const size = n + turns;
  const omega = 2 * Math.PI * frequency;
  // Rows of [re | im] as two arrays per row: plain Gauss elimination with row pivoting.
  const re = Array.from({ length: size }, () => new Float64Array(size + 1));
  const im = Array.from({ length: size }, () => new Float64Array(size + 1));
  for (const [i, p] of cells.entries()) {
    for (const [j, q] of cells.entries()) {
      if (j < i) continue;
      const m =
        i === j
          ? MU0 * p.r * (Math.log((8 * p.r) / Math.min(p.gmd, p.r)) - 2)
          : circlesMutual(p.r, q.r, p.z - q.z);
      (im[i] as Float64Array)[j] = omega * m;
      (im[j] as Float64Array)[i] = omega * m;
    }
    (re[i] as Float64Array)[i] = (p.resistivity * 2 * Math.PI * p.r) / p.area;
    if (p.turn >= 0) {
      (re[i] as Float64Array)[n + p.turn] = -1;
      (re[n + p.turn] as Float64Array)[i] = 1;
    }
  }
  for (let t = 0; t < turns; t++) (re[n + t] as Float64Array)[size] = 1;
  eliminate(re, im, size);
  const xr = re.map((row) => row[size] ?? 0);
  const xi = im.map((row) => row[size] ?? 0);
  let vr = 0;
  let vi = 0;
  for (let t = 0; t < turns; t++) {
    vr += xr[n + t] ?? 0;
    vi += xi[n + t] ?? 0;
  }
  let load = 0;
  for (const [i, p] of cells.entries()) {
    if (p.turn < 0)
      load += (((xr[i] ?? 0) ** 2 + (xi[i] ?? 0) ** 2) * p.resistivity * 2 * Math.PI * p.r) / p.area;
  }
  return { inductance: vi / omega, resistance: vr, load, unknowns: size };
}

/** Gauss elimination; the solution replaces the last column. */
function eliminate(re: Float64Array[], im: Float64Array[], n: number): void {
  for (let k = 0; k < n; k++) {
    let best = k;
    let largest = -1;
    for (let i = k; i < n; i++) {
      const s = Math.hypot(re[i]?.[k] ?? 0, im[i]?.[k] ?? 0);
      if (s > largest) {
        largest = s;
        best = i;
      }
    }
    [re[k], re[best]] = [re[best] as Float64Array, re[k] as Float64Array];
    [im[k], im[best]] = [im[best] as Float64Array, im[k] as Float64Array];
    const pr = re[k] as Float64Array;
    const pi = im[k] as Float64Array;
    const d = (pr[k] ?? 0) ** 2 + (pi[k] ?? 0) ** 2;
    const qr = (pr[k] ?? 0) / d;
    const qi = -(pi[k] ?? 0) / d;
    for (let i = k + 1; i < n; i++) {
      const ar = re[i] as Float64Array;
      const ai = im[i] as Float64Array;
      const x = ar[k] as number;
      const y = ai[k] as number;
      if (x === 0 && y === 0) continue;
      const fr = x * qr - y * qi;
      const fi = x * qi + y * qr;
      for (let j = k; j <= n; j++) {
        const br = pr[j] as number;
        const bi = pi[j] as number;
        ar[j] = (ar[j] as number) - (fr * br - fi * bi);
        ai[j] = (ai[j] as number) - (fr * bi + fi * br);
      }
    }
  }
  for (let i = n - 1; i >= 0; i--) {
    const ar = re[i] as Float64Array;
    const ai = im[i] as Float64Array;
    let sr = ar[n] as number;
    let si = ai[n] as number;
    for (let j = i + 1; j < n; j++) {
      const br = (re[j] as Float64Array)[n] as number;
      const bi = (im[j] as Float64Array)[n] as number;
      sr -= (ar[j] as number) * br - (ai[j] as number) * bi;
      si -= (ar[j] as number) * bi + (ai[j] as number) * br;
    }
    const dr = ar[i] as number;
    const di = ai[i] as number;
    const d = dr * dr + di * di;
    ar[n] = (sr * dr + si * di) / d;
    ai[n] = (si * dr - sr * di) / d;
  }
}
