import { MU0 } from '../constants/physical.ts';

/**
 * Ring kernel: F(P,Q) = M(P,Q)/(2π μ0) for coaxial filaments, M Maxwell's mutual inductance, and its
 * normal derivative at Q, by the arithmetic–geometric mean without cancellation.
 *
 * With al² = (rP+rQ)²+dz², be² = (rP−rQ)²+dz², k² = 4 rP rQ/al², k' = be/al (formed directly, never as
 * 1−k²) the means give K(k) and S = [(1−k²/2)K − E]/K as a sum of positive terms, F = al·K·S/(2π).
 * Range: any two distinct points off the axis; relative error about 1e-15 for F.
 * Source: Maxwell, A Treatise on Electricity and Magnetism, art. 701; arithmetic–geometric mean after
 * King (1924) and Abramowitz & Stegun ch. 17.
 *
 * The result is left in `ringKernelOut`: [F, dF/dn at Q] (one small array, so that the innermost loop
 * of the assembly allocates nothing).
 */
export const ringKernelOut = new Float64Array(2);

export function ringKernel(rP: number, zP: number, rQ: number, zQ: number, nr: number, nz: number): void {
  const dz = zQ - zP;
  const dz2 = dz * dz;
  const sum = rP + rQ;
  const difference = rP - rQ;
  const al2 = sum * sum + dz2;
  const be2 = difference * difference + dz2;
  const al = Math.sqrt(al2);
  const k2 = (4 * rP * rQ) / al2;
  const kp = Math.sqrt(be2) / al;
  let a = 0.5 * (1 + kp);
  let b = Math.sqrt(kp);
  let c = k2 / (4 * a);
  let s = c * c;
  let p = 1;
  while (c > 1e-9) {
    p *= 2;
    const an = 0.5 * (a + b);
    c = (c * c) / (4 * an);
    b = Math.sqrt(a * b);
    a = an;
    s += p * c * c;
  }
  const bigK = Math.PI / (2 * a);
  const m = 1 - 0.5 * k2;
  const common = bigK / (2 * Math.PI * al);
  ringKernelOut[0] = al2 * common * s;
  const dr = rQ * common * (1 + ((rP * rP - rQ * rQ - dz2) / be2) * (m - s));
  const dzTerm = (-dz * common * (0.25 * k2 * k2 - m * s) * al2) / be2;
  ringKernelOut[1] = nr * dr + nz * dzTerm;
}

/**
 * Mutual inductance of two coaxial circular filaments, H.
 *
 * @param rA radius of one, m, > 0   @param rB radius of the other, m, > 0   @param dz distance, m
 * Source: Maxwell, art. 701. Example: radii 0.25 and 0.20 m, 0.10 m apart → 0.248787 µH.
 */
export function mutualInductance(rA: number, rB: number, dz: number): number {
  ringKernel(rA, 0, rB, dz, 0, 0);
  return 2 * Math.PI * MU0 * (ringKernelOut[0] ?? 0);
}
