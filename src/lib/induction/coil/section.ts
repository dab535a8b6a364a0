import type { TubeSection } from '../check/types.ts';
import { InductionInputError, requireWithin } from '../input-error.ts';

/** Conductor section about its own centre, m. A solid conductor has a wall of half its thickness. */
export type Section =
  | { kind: 'round'; halfAxial: number; halfRadial: number; radius: number; wall: number }
  | {
      kind: 'rectangular';
      halfAxial: number;
      halfRadial: number;
      wall: number;
      outerCorner: number;
      innerCorner: number;
    };

/** Smallest and largest dimension the physics accepts, m: beyond it the unit was mistaken. */
export const SMALLEST_LENGTH = 1e-5;
export const LARGEST_LENGTH = 20;

/**
 * Checked section of a tube. Inside corner radius of a rectangular tube: outside radius less the wall,
 * not below zero (a drawn or machined corner).
 *
 * @throws InductionInputError when a dimension is not a number, absurd, or the wall exceeds the half
 */
export function sectionOf(tube: TubeSection): Section {
  if (tube.kind === 'round') {
    requireWithin(tube.outsideDiameter, 5e-5, 1, 'coil.tube.outsideDiameter', 'Tube outside diameter');
    const radius = tube.outsideDiameter / 2;
    requireWall(tube.wall, radius);
    return {
      kind: 'round',
      halfAxial: radius,
      halfRadial: radius,
      radius,
      wall: Math.min(tube.wall, radius),
    };
  }
  const axial = tube.kind === 'square' ? tube.side : tube.axialWidth;
  const radial = tube.kind === 'square' ? tube.side : tube.radialHeight;
  requireWithin(axial, 5e-5, 2, 'coil.tube.axialWidth', 'Tube width along the axis');
  requireWithin(radial, 5e-5, 1, 'coil.tube.radialHeight', 'Tube height across the axis');
  const half = Math.min(axial, radial) / 2;
  requireWall(tube.wall, half);
  requireWithin(tube.cornerRadius, 0, half * (1 + 1e-9), 'coil.tube.cornerRadius', 'Tube corner radius');
  return {
    kind: 'rectangular',
    halfAxial: axial / 2,
    halfRadial: radial / 2,
    wall: Math.min(tube.wall, half),
    outerCorner: tube.cornerRadius,
    innerCorner: Math.max(0, tube.cornerRadius - tube.wall),
  };
}

function requireWall(wall: number, half: number): void {
  requireWithin(wall, SMALLEST_LENGTH, 1, 'coil.tube.wall', 'Tube wall');
  if (wall > half * (1 + 1e-9)) {
    throw new InductionInputError(
      'section-impossible',
      'coil.tube.wall',
      'The tube wall is thicker than half the tube: there is no such tube.',
    );
  }
}

/** Metal area of the section, m². */
export function metalArea(section: Section): number {
  if (section.kind === 'round') {
    const inner = section.radius - section.wall;
    return Math.PI * (section.radius ** 2 - inner ** 2);
  }
  const w = section.wall;
  const outer = 4 * section.halfAxial * section.halfRadial - (4 - Math.PI) * section.outerCorner ** 2;
  const inner =
    4 * (section.halfAxial - w) * (section.halfRadial - w) - (4 - Math.PI) * section.innerCorner ** 2;
  return outer - Math.max(0, inner);
}
