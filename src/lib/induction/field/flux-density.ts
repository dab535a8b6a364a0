import { MU0 } from '../constants/physical.ts';
import type { CoilBlock, FieldSolution } from './coil-block.ts';
import { ringKernel, ringKernelOut } from './ring-kernel.ts';

/** Flux density at a place, rms phasors in tesla for 1 A in the rings, and its magnitude. */
export interface FluxDensity {
  radial: { re: number; im: number };
  axial: { re: number; im: number };
  magnitude: number;
}

/**
 * Flux density in the air at radius r and height z of the coil's frame, with the part and the real
 * distribution of current in the tubes, from the solved surface currents and fields:
 * r·A = μ0 ∮ F·K dl − ∮ (E/jω) ∂F/∂n dl, B = curl A by central differences.
 *
 * @param r m, ≥ 0   @param z m
 * Range: further than a panel (about a tube diameter) from metal; inside metal the value has no meaning.
 * Leads are not included. Source: Green's identity of the boundary equation.
 */
export function fluxDensityAt(block: CoilBlock, field: FieldSolution, r: number, z: number): FluxDensity {
  const scale = Math.max(...block.geometry.coil.rings.map((ring) => ring.radius));
  const reach = Math.max(scale, Math.hypot(r, z));
  const h = 1e-4 * reach;
  // On the axis r·A falls as r²: a small circle about it carries the axial field.
  if (r < 2 * h) {
    const rim = 2 * h;
    const p = fluxFunction(block, field, rim, z);
    const axial = { re: (2 * p.re) / (rim * rim), im: (2 * p.im) / (rim * rim) };
    return { radial: { re: 0, im: 0 }, axial, magnitude: Math.hypot(axial.re, axial.im) };
  }
  const out = fluxFunction(block, field, r + h, z);
  const inn = fluxFunction(block, field, r - h, z);
  const up = fluxFunction(block, field, r, z + h);
  const down = fluxFunction(block, field, r, z - h);
  const f = 1 / (2 * h * r);
  const axial = { re: (out.re - inn.re) * f, im: (out.im - inn.im) * f };
  const radial = { re: (down.re - up.re) * f, im: (down.im - up.im) * f };
  return { radial, axial, magnitude: Math.hypot(axial.re, axial.im, radial.re, radial.im) };
}

/** r·A at a point of the air, Wb per radian for 1 A. */
function fluxFunction(
  block: CoilBlock,
  field: FieldSolution,
  r: number,
  z: number,
): { re: number; im: number } {
  const { boundary: b, column } = block.geometry;
  const omega = 2 * Math.PI * block.frequency;
  let re = 0;
  let im = 0;
  for (let q = 0; q < b.n; q++) {
    const c = column[q] as number;
    ringKernel(r, z, b.r[q] as number, b.z[q] as number, b.nr[q] as number, b.nz[q] as number);
    const w = b.w[q] as number;
    const s = MU0 * w * (ringKernelOut[0] as number);
    const d = (w * (ringKernelOut[1] as number)) / omega;
    // −E/(jω) = jE/ω
    re += s * (field.k.re[c] as number) - d * (field.e.im[c] as number);
    im += s * (field.k.im[c] as number) + d * (field.e.re[c] as number);
  }
  return { re, im };
}
