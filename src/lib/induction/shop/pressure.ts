/** Pressure a tube section bears. */
import type { TubeSection } from '../check/types.ts';

/** Allowable stress of annealed copper, Pa: 6000 psi (ASME B31, from memory). */
export const annealedCopperStress = 6000 * 6894.757293168;
/** Young's modulus (Pa) and Poisson's ratio of copper (handbook values, from memory). */
const youngsModulus = 117e9;
const poissonRatio = 0.34;

/** Barlow: p = 2·S·t/D for a round tube, Pa. */
export const barlow = (outsideDiameter: number, wall: number, stress = annealedCopperStress): number =>
  (2 * stress * wall) / outsideDiameter;

/** Bending stress of a flat wall clamped at both edges, p·b²/(2·t²), Pa; b = inside width of the wall. */
export const flatWallStress = (pressure: number, width: number, wall: number): number =>
  (pressure * width ** 2) / (2 * wall ** 2);

/** Bulge of the middle of a flat wall clamped at both edges, p·b⁴·(1 − ν²)/(32·E·t³), m. Plate strip theory. */
export const flatWallBulge = (pressure: number, width: number, wall: number): number =>
  (pressure * width ** 4 * (1 - poissonRatio ** 2)) / (32 * youngsModulus * wall ** 3);

/** Inside width of the widest flat wall, m; 0 for a round tube. */
export function widestFlat(tube: TubeSection): number {
  if (tube.kind === 'round') return 0;
  const side = tube.kind === 'square' ? tube.side : Math.max(tube.axialWidth, tube.radialHeight);
  return Math.max(0, side - 2 * Math.max(tube.wall, tube.cornerRadius));
}

/** Working pressure at which the section reaches the allowable stress of annealed copper, Pa. */
export function pressureRating(tube: TubeSection, wall = tube.wall): number {
  if (tube.kind === 'round') return barlow(tube.outsideDiameter, wall);
  const flat = widestFlat(tube);
  const side = tube.kind === 'square' ? tube.side : Math.max(tube.axialWidth, tube.radialHeight);
  const membrane = barlow(side, wall);
  return flat > 0 ? Math.min(membrane, (2 * annealedCopperStress * wall ** 2) / flat ** 2) : membrane;
}

/** Test pressure of the trade: 1.5 times the working pressure (common practice). */
export const testPressureFactor = 1.5;
