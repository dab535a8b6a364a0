import { MU0 } from '../constants/physical.ts';
import type { MagnetisationLaw, Material } from './types.ts';

/**
 * Saturation flux density at T °C, tesla: Bs0·√(1 − x³), x = (T − 20)/(Tc − 20) within 0…1.
 * A smooth fall to zero at the Curie point; forms in use differ (from memory, ±10 %).
 */
export function saturationAt(law: MagnetisationLaw, temperatureC: number): number {
  const x = Math.min(1, Math.max(0, (temperatureC - 20) / (law.curieC - 20)));
  return law.saturation * Math.sqrt(Math.max(0, 1 - x * x * x));
}

/**
 * Secant relative permeability B/(μ0·H) at peak field `peakField` (A/m), Froehlich law.
 * Example: Bs 1.8 T, μi 400, H = 28 284 A/m → 46 (surface value of reference case D-T2: 45.9).
 */
export function secantPermeability(law: MagnetisationLaw, temperatureC: number, peakField: number): number {
  return secantFor(saturationAt(law, temperatureC), law.initialPermeability, Math.abs(peakField));
}

function secantFor(saturation: number, initial: number, field: number): number {
  if (saturation <= 0 || initial <= 1) return 1;
  return 1 + saturation / (MU0 * field + saturation / (initial - 1));
}

const MIDPOINTS = 12;
const SINES = Float64Array.from({ length: MIDPOINTS }, (_, k) => Math.sin(((k + 0.5) * Math.PI) / MIDPOINTS));

/**
 * Describing-function relative permeability: the fundamental of B(Hpk·sin θ) over Hpk, in units of μ0,
 * μ = (2/Hpk)·⟨B(Hpk sin θ)·sin θ⟩/μ0 over half a period (12 midpoints). Between μi (small field) and 1.
 *
 * @param peakField peak (not rms) of the sinusoidal field, A/m
 * Source: first-harmonic (describing-function) linearisation; `Bs` and Curie as in `saturationAt`.
 */
export function describingPermeability(
  law: MagnetisationLaw,
  temperatureC: number,
  peakField: number,
): number {
  const saturation = saturationAt(law, temperatureC);
  const field = Math.abs(peakField);
  if (saturation <= 0 || law.initialPermeability <= 1) return 1;
  let sum = 0;
  for (let k = 0; k < MIDPOINTS; k++) {
    const s = SINES[k] ?? 0;
    sum += secantFor(saturation, law.initialPermeability, field * s) * s * s;
  }
  return (2 * sum) / MIDPOINTS;
}

/** Initial (small-field) relative permeability at T °C; 1 for non-magnetic or above Curie. */
export function initialPermeability(material: Material, temperatureC: number): number {
  const law = material.magnetisation;
  if (law === null || temperatureC >= law.curieC) return 1;
  return law.initialPermeability;
}

/** Secant relative permeability of a material at T °C and a peak field in A/m (1 where not magnetic). */
export function relativePermeability(material: Material, temperatureC: number, peakField: number): number {
  const law = material.magnetisation;
  return law === null ? 1 : secantPermeability(law, temperatureC, peakField);
}
