import { KELVIN_OFFSET, STEFAN_BOLTZMANN } from '../constants/physical.ts';

/** What conduction needs to know of a material. */
export interface HeatProperties {
  density: number;
  /** J/kg above any fixed level, rising with T. */
  enthalpy(temperatureC: number): number;
  conductivity(temperatureC: number): number;
}

/** Heat transfer at one side of the grid; null: adiabatic (mirror plane, axis, cut). */
export interface SurfaceTransfer {
  /** W/(m²·K) */
  convection: number;
  emissivity: number;
}

/**
 * Cells of revolution: edges in r and z ascending, m; index iz·nr + ir. Sides named by the edge they are on.
 */
export interface ConductionGrid {
  r: Float64Array;
  z: Float64Array;
  sides: Record<'inner' | 'outer' | 'low' | 'high', SurfaceTransfer | null>;
}

export interface ConductionState {
  grid: ConductionGrid;
  nr: number;
  nz: number;
  volume: Float64Array;
  /** °C per cell. */
  temperature: Float64Array;
  /** Heat lost through the surfaces in the last step, W at its end. */
  loss: number;
}

export function conductionState(grid: ConductionGrid, startC: number): ConductionState {
  const nr = grid.r.length - 1;
  const nz = grid.z.length - 1;
  const volume = new Float64Array(nr * nz);
  for (let iz = 0; iz < nz; iz++) {
    const dz = (grid.z[iz + 1] as number) - (grid.z[iz] as number);
    for (let ir = 0; ir < nr; ir++) {
      const a = grid.r[ir] as number;
      const b = grid.r[ir + 1] as number;
      volume[iz * nr + ir] = Math.PI * (b * b - a * a) * dz;
    }
  }
  return { grid, nr, nz, volume, temperature: new Float64Array(nr * nz).fill(startC), loss: 0 };
}

const TOLERANCE = 0.05;
const MOST_ITERATIONS = 12;
const LARGEST_CHANGE = 200;

/**
 * One implicit Euler step in enthalpy form: V·ρ·(h(T) − h(T_old))/dt = q + Σ conduction − loss, by Newton with
 * dh/dT; energy is conserved exactly through transformation peaks. Conductances in series over half cells;
 * surfaces lose by convection and grey radiation through their half cell.
 *
 * @param source W per cell   @param dt s   @param ambientC °C
 * @returns the new temperatures and loss, or null when Newton does not settle (take a smaller step)
 * Source: Patankar, Numerical Heat Transfer and Fluid Flow (1980); grey body in large surroundings.
 */
export function conductionStep(
  state: ConductionState,
  material: HeatProperties,
  source: Float64Array,
  dt: number,
  ambientC: number,
): { temperature: Float64Array; loss: number } | null {
  const { nr, nz, volume, temperature: old } = state;
  const n = nr * nz;
  const t = old.slice();
  const h0 = old.map((x) => material.enthalpy(x));
  const radialFirst = nr <= nz;
  const width = (radialFirst ? nr : nz) + 1;
  const band = new Float64Array(n * width);
  const rhs = new Float64Array(n);
  const surface = surfacesOf(state);
  const surfaceC = surface.map((s) => old[s.cell] as number);
  for (let iteration = 0; iteration < MOST_ITERATIONS; iteration++) {
    band.fill(0);
    const at = (cell: number) => (radialFirst ? cell : (cell % nr) * nz + ((cell / nr) | 0));
    for (let c = 0; c < n; c++) {
      const x = t[c] as number;
      const rate = (material.density * (volume[c] as number)) / dt;
      const row = at(c);
      band[row * width + width - 1] =
        rate * Math.max(1, material.enthalpy(x + 0.5) - material.enthalpy(x - 0.5));
      rhs[row] = (source[c] as number) - rate * (material.enthalpy(x) - (h0[c] as number));
    }
    conduct(state, material, t, band, rhs, width, at);
    const loss = loseHeat(surface, material, t, surfaceC, ambientC, band, rhs, width, at);
    if (!solveBanded(n, width, band, rhs)) return null;
    let largest = 0;
    for (let c = 0; c < n; c++) {
      const change = Math.max(-LARGEST_CHANGE, Math.min(LARGEST_CHANGE, rhs[at(c)] as number));
      t[c] = (t[c] as number) + change;
      largest = Math.max(largest, Math.abs(change));
    }
    if (!Number.isFinite(largest)) return null;
    if (largest < TOLERANCE) return { temperature: t, loss };
  }
  return null;
}

type Place = (cell: number) => number;

function conduct(
  state: ConductionState,
  material: HeatProperties,
  t: Float64Array,
  band: Float64Array,
  rhs: Float64Array,
  width: number,
  at: Place,
): void {
  const { nr, nz, grid } = state;
  const k = t.map((x) => material.conductivity(x));
  const pair = (a: number, b: number, g: number) => {
    const p = at(a);
    const q = at(b);
    const flow = g * ((t[a] as number) - (t[b] as number));
    rhs[p] = (rhs[p] as number) - flow;
    rhs[q] = (rhs[q] as number) + flow;
    band[p * width + width - 1] = (band[p * width + width - 1] as number) + g;
    band[q * width + width - 1] = (band[q * width + width - 1] as number) + g;
    const low = Math.min(p, q);
    const high = Math.max(p, q);
    const place = high * width + width - 1 - (high - low);
    band[place] = (band[place] as number) - g;
  };
  for (let iz = 0; iz < nz; iz++) {
    const dz = (grid.z[iz + 1] as number) - (grid.z[iz] as number);
    for (let ir = 0; ir < nr; ir++) {
      const c = iz * nr + ir;
      const r0 = grid.r[ir] as number;
      const r1 = grid.r[ir + 1] as number;
      if (ir + 1 < nr) {
        const r2 = grid.r[ir + 2] as number;
        const resistance =
          Math.log(r1 / (0.5 * (r0 + r1))) / (k[c] as number) +
          Math.log((0.5 * (r1 + r2)) / r1) / (k[c + 1] as number);
        pair(c, c + 1, (2 * Math.PI * dz) / resistance);
      }
      if (iz + 1 < nz) {
        const up = (grid.z[iz + 2] as number) - (grid.z[iz + 1] as number);
        const resistance = dz / 2 / (k[c] as number) + up / 2 / (k[c + nr] as number);
        pair(c, c + nr, (Math.PI * (r1 * r1 - r0 * r0)) / resistance);
      }
    }
  }
}

interface SurfaceFace {
  cell: number;
  area: number;
  half: number;
  transfer: SurfaceTransfer;
}

function surfacesOf(state: ConductionState): SurfaceFace[] {
  const { nr, nz, grid } = state;
  const faces: SurfaceFace[] = [];
  for (let iz = 0; iz < nz; iz++) {
    const dz = (grid.z[iz + 1] as number) - (grid.z[iz] as number);
    const r = grid.r;
    const { inner, outer } = grid.sides;
    const last = r[nr] as number;
    if (outer !== null) {
      const half = (last - (r[nr - 1] as number)) / 2;
      faces.push({ cell: iz * nr + nr - 1, area: 2 * Math.PI * last * dz, half, transfer: outer });
    }
    if (inner !== null && (r[0] as number) > 0) {
      const half = ((r[1] as number) - (r[0] as number)) / 2;
      faces.push({ cell: iz * nr, area: 2 * Math.PI * (r[0] as number) * dz, half, transfer: inner });
    }
  }
  for (let ir = 0; ir < nr; ir++) {
    const area = Math.PI * ((grid.r[ir + 1] as number) ** 2 - (grid.r[ir] as number) ** 2);
    const { low, high } = grid.sides;
    if (low !== null) {
      faces.push({
        cell: ir,
        area,
        half: ((grid.z[1] as number) - (grid.z[0] as number)) / 2,
        transfer: low,
      });
    }
    if (high !== null) {
      const half = ((grid.z[nz] as number) - (grid.z[nz - 1] as number)) / 2;
      faces.push({ cell: (nz - 1) * nr + ir, area, half, transfer: high });
    }
  }
  return faces;
}

/** Adds surface losses to the system; `surfaceC` is carried from one iteration to the next. */
function loseHeat(
  faces: SurfaceFace[],
  material: HeatProperties,
  t: Float64Array,
  surfaceC: number[],
  ambientC: number,
  band: Float64Array,
  rhs: Float64Array,
  width: number,
  at: Place,
): number {
  let total = 0;
  const ta = ambientC + KELVIN_OFFSET;
  for (const [i, face] of faces.entries()) {
    const cell = t[face.cell] as number;
    const k = material.conductivity(cell);
    let g = 0;
    // The surface temperature and the radiation coefficient settle in a few rounds.
    for (let round = 0; round < 4; round++) {
      const ts = (surfaceC[i] as number) + KELVIN_OFFSET;
      const h =
        face.transfer.convection +
        face.transfer.emissivity * STEFAN_BOLTZMANN * (ts * ts + ta * ta) * (ts + ta);
      g = h > 0 ? face.area / (1 / h + face.half / k) : 0;
      surfaceC[i] = cell - (g * (cell - ambientC) * face.half) / (k * face.area);
    }
    const loss = g * (cell - ambientC);
    total += loss;
    const row = at(face.cell);
    rhs[row] = (rhs[row] as number) - loss;
    band[row * width + width - 1] = (band[row * width + width - 1] as number) + g;
  }
  return total;
}

/** Temperature of the surface at a face of cell `cell`: its own less the drop over the half cell, °C. */
export function surfaceTemperature(
  cellC: number,
  half: number,
  transfer: SurfaceTransfer,
  conductivity: number,
  ambientC: number,
): number {
  const ta = ambientC + KELVIN_OFFSET;
  let surface = cellC;
  for (let round = 0; round < 8; round++) {
    const ts = surface + KELVIN_OFFSET;
    const h = transfer.convection + transfer.emissivity * STEFAN_BOLTZMANN * (ts * ts + ta * ta) * (ts + ta);
    if (h <= 0) return cellC;
    surface = cellC - ((cellC - ambientC) / (1 / h + half / conductivity)) * (half / conductivity);
  }
  return surface;
}

/** Symmetric positive definite band (lower, row-major, diagonal last): L·D·Lᵀ and solve in place. */
function solveBanded(n: number, width: number, a: Float64Array, x: Float64Array): boolean {
  const hb = width - 1;
  const v = new Float64Array(width);
  for (let i = 0; i < n; i++) {
    const first = Math.max(0, i - hb);
    const ri = i * width + hb - i;
    for (let j = first; j < i; j++) {
      const rj = j * width + hb - j;
      let s = a[ri + j] as number;
      for (let k = Math.max(first, j - hb); k < j; k++) s -= (v[k - first] as number) * (a[rj + k] as number);
      v[j - first] = s;
    }
    let d = a[ri + i] as number;
    for (let j = first; j < i; j++) {
      const l = (v[j - first] as number) / (a[j * width + hb] as number);
      a[ri + j] = l;
      d -= (v[j - first] as number) * l;
    }
    if (!(d > 0)) return false;
    a[ri + i] = d;
  }
  for (let i = 0; i < n; i++) {
    const ri = i * width + hb - i;
    for (let k = Math.max(0, i - hb); k < i; k++)
      x[i] = (x[i] as number) - (a[ri + k] as number) * (x[k] as number);
  }
  for (let i = 0; i < n; i++) x[i] = (x[i] as number) / (a[i * width + hb] as number);
  for (let i = n - 1; i >= 0; i--) {
    const ri = i * width + hb - i;
    for (let k = Math.max(0, i - hb); k < i; k++)
      x[k] = (x[k] as number) - (a[ri + k] as number) * (x[i] as number);
  }
  return true;
}
