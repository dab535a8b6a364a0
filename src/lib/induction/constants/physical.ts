/**
 * Physical constants of the field solution, SI.
 *
 * μ0 is the value of the pre-2019 SI definition, 4π·10⁻⁷ H/m; the CODATA 2018 measured value differs
 * by 5.5·10⁻¹⁰ relative, far below every other uncertainty here.
 */
export const MU0 = 4e-7 * Math.PI;

/** Stefan–Boltzmann constant, W/(m²·K⁴): exact in the 2019 SI (from k, h, c). */
export const STEFAN_BOLTZMANN = 5.670374419e-8;

/** 0 °C in kelvin (by definition of the Celsius scale). */
export const KELVIN_OFFSET = 273.15;

/**
 * Skin depth δ = √(ρ/(π f μ0 μr)), m.
 *
 * @param resistivity Ω·m, > 0
 * @param frequency Hz, > 0
 * @param relativePermeability ≥ 1
 * Source: plane-wave solution in a good conductor; any text on eddy currents.
 * Example: copper 1.7241e-8 Ω·m at 10 kHz → 6.61e-4 m.
 */
export function skinDepth(resistivity: number, frequency: number, relativePermeability = 1): number {
  return Math.sqrt(resistivity / (Math.PI * frequency * MU0 * relativePermeability));
}
