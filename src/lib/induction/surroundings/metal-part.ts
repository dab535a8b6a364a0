/** Heat in a small piece of metal near the coil: an estimate from a sphere in a uniform field. */
import { MU0, skinDepth } from '../constants/physical.ts';

/**
 * Power in a conducting sphere of diameter `size` in a uniform alternating field B (rms), W.
 *
 * Skin much thinner than the sphere: 6π·a²·(ρ/δ)·H²; much thicker: (2π/15)·ω²·B²·a⁵/ρ; between, the two in
 * series (reciprocal sum), within a factor of two for real shapes. Source: surface field 1.5·H·sin θ of a screening
 * sphere and the induced field ω·B·r/2 of a transparent one.
 *
 * @param relativePermeability used for the skin depth only
 */
export function spherePower(
  fluxDensity: number,
  size: number,
  frequency: number,
  resistivity: number,
  relativePermeability = 1,
): number {
  const a = size / 2;
  const delta = skinDepth(resistivity, frequency, relativePermeability);
  const omega = 2 * Math.PI * frequency;
  const thin = 6 * Math.PI * a * a * (resistivity / delta) * (fluxDensity / MU0) ** 2;
  const thick = ((2 * Math.PI) / 15) * omega ** 2 * fluxDensity ** 2 * (a ** 5 / resistivity);
  return thin > 0 && thick > 0 ? 1 / (1 / thin + 1 / thick) : 0;
}

/** Steady temperature rise of the piece in still air, 15 W/(m²·K) of convection and radiation (common practice), K. */
export const steadyRise = (power: number, size: number): number => power / (15 * Math.PI * size * size);
