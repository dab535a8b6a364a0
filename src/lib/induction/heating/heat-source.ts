import type { ComplexVector } from '../field/complex-dense.ts';
import type { LoadElements } from '../field/load-operator.ts';

/** Two Gauss points on (0, 1). */
const HALF = [0.5 - Math.sqrt(1 / 12), 0.5 + Math.sqrt(1 / 12)] as const;

function quadratic(t: number): readonly [number, number, number] {
  return [0.5 * t * (t - 1), 1 - t * t, 0.5 * t * (t + 1)];
}

/**
 * Heat per thermal cell, W for 1 A: each quadratic element is split two by two and |E|²/ρ integrated over
 * every quarter with 2 × 2 Gauss points, so that the mapping loses nothing; then scaled so that the sum is
 * `power` (the raw sum differs by some tenths of a per cent).
 *
 * @param field E at the free nodes for 1 A   @param resistivity per element, Ω·m   @param power W
 */
export function cellSources(
  e: LoadElements,
  field: ComplexVector,
  resistivity: Float64Array,
  power: number,
): Float64Array {
  const nr = 2 * e.nr;
  const out = new Float64Array(nr * 2 * e.nz);
  const nnr = 2 * e.nr + 1;
  let total = 0;
  for (let kz = 0; kz < e.nz; kz++) {
    const dz = (e.grid.z[kz + 1] as number) - (e.grid.z[kz] as number);
    for (let kr = 0; kr < e.nr; kr++) {
      const r0 = e.grid.r[kr] as number;
      const dr = (e.grid.r[kr + 1] as number) - r0;
      for (let qz = 0; qz < 2; qz++) {
        for (let qr = 0; qr < 2; qr++) {
          let sum = 0;
          for (const a of HALF) {
            const nz = quadratic(-1 + qz + a);
            for (const b of HALF) {
              const s = -1 + qr + b;
              const n = quadratic(s);
              let re = 0;
              let im = 0;
              for (let i = 0; i < 3; i++) {
                for (let j = 0; j < 3; j++) {
                  const node = e.index[(2 * kz + i) * nnr + 2 * kr + j] as number;
                  if (node < 0) continue;
                  const v = (nz[i] as number) * (n[j] as number);
                  re += v * (field.re[node] as number);
                  im += v * (field.im[node] as number);
                }
              }
              sum += (re * re + im * im) * 2 * Math.PI * (r0 + ((1 + s) / 2) * dr);
            }
          }
          const q = (sum * dr * dz) / 16 / (resistivity[kz * e.nr + kr] as number);
          out[(2 * kz + qz) * nr + 2 * kr + qr] = q;
          total += q;
        }
      }
    }
  }
  const scale = total > 0 ? power / total : 0;
  return out.map((q) => q * scale);
}
