import type { Coil, Workpiece } from '../check/types.ts';
import { requireWithin } from '../input-error.ts';
import type { Material } from '../materials/types.ts';

/** Copper temperature taken when none is entered, °C (mean of a water-cooled coil; common practice). */
export const DEFAULT_COPPER_C = 40;

export function copperTemperature(coil: Coil): number {
  const t = coil.copperTemperatureC ?? DEFAULT_COPPER_C;
  requireWithin(t, -60, 1000, 'coil.copperTemperatureC', 'Copper temperature');
  return t;
}

/** Temperature of the part by depth below its heated surface: `surface` down to `depth`, then `core`. */
export interface PartTemperature {
  surface: number;
  core: number;
  /** null: `surface` throughout. */
  depth: number | null;
}

/**
 * Thermal state of a part for one query: cold = start temperature throughout; hot = target temperature
 * in a surface layer of the depth wanted over a core still at the start temperature, or throughout when
 * no depth is asked (through heating).
 */
export function partTemperature(
  part: Workpiece,
  state: 'cold' | 'hot',
  startC: number,
  targetC: number,
): PartTemperature {
  requireWithin(startC, -60, 3000, 'process.startTemperatureC', 'Start temperature');
  if (state === 'cold') return { surface: startC, core: startC, depth: null };
  requireWithin(targetC, -60, 3400, 'process.targetTemperatureC', 'Target temperature');
  if (part.depthWanted === null) return { surface: targetC, core: targetC, depth: null };
  requireWithin(part.depthWanted, 1e-6, 10, 'part.depthWanted', 'Depth wanted');
  return { surface: targetC, core: startC, depth: part.depthWanted };
}

/** Whether a material still has a Curie point above the temperature. */
export function isMagneticAt(material: Material, temperatureC: number): boolean {
  return material.magnetisation !== null && temperatureC < material.magnetisation.curieC;
}
