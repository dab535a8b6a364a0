/** The hole in a tube. */
import type { TubeSection } from '../check/types.ts';

export interface Bore {
  area: number;
  perimeter: number;
  hydraulicDiameter: number;
}

/** Bore area, wetted perimeter and hydraulic diameter 4A/P; null when the section is solid or impossible. */
export function boreOf(tube: TubeSection): Bore | null {
  if (tube.kind === 'round') {
    const inside = tube.outsideDiameter - 2 * tube.wall;
    if (!(inside > 1e-6 * tube.outsideDiameter)) return null;
    return { area: (Math.PI * inside ** 2) / 4, perimeter: Math.PI * inside, hydraulicDiameter: inside };
  }
  const outer = tube.kind === 'square' ? [tube.side, tube.side] : [tube.axialWidth, tube.radialHeight];
  const [a = 0, b = 0] = outer.map((side) => side - 2 * tube.wall);
  if (!(Math.min(a, b) > 1e-6 * Math.max(...outer))) return null;
  const corner = Math.min(Math.max(0, tube.cornerRadius - tube.wall), a / 2, b / 2);
  const area = a * b - (4 - Math.PI) * corner ** 2;
  const perimeter = 2 * (a + b) - (8 - 2 * Math.PI) * corner;
  return { area, perimeter, hydraulicDiameter: (4 * area) / perimeter };
}
