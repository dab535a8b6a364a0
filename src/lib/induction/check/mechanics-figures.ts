/** Clearances, wall after bending, pressure. */
import { pressureRating, testPressureFactor } from '../shop/pressure.ts';
import { bendingSize, wallAfterBending, type CopperPath } from '../shop/path.ts';
import type { MaterialFamily } from '../materials/types.ts';
import { gapBetweenTurns } from './build-models.ts';
import { figure } from './figure.ts';
import type { Geometry } from './resolve.ts';
import type { Mechanics, Requirement } from './types.ts';
import { waterDefaults } from './water-figures.ts';

/** Mean linear expansion from room temperature to hot working, 1/K (handbook values, from memory). */
const expansion: Record<MaterialFamily, number> = {
  'carbon-steel': 14.5e-6,
  'alloy-steel': 14.5e-6,
  'stainless-steel': 18.5e-6,
  aluminium: 25e-6,
  copper: 18.5e-6,
  brass: 20.5e-6,
  titanium: 9.7e-6,
  'nickel-alloy': 15e-6,
  carbide: 5.5e-6,
  graphite: 4.5e-6,
  refractory: 5.5e-6,
  own: 15e-6,
};

/** Radial clearance between copper and part, cold, m; null where they do not face each other radially. */
export function radialClearance(geometry: Geometry): number | null {
  const { rings, section, body } = geometry;
  if (!rings || !section || !body || geometry.coil.winding.shape === 'pancake') return null;
  const inner = Math.min(...rings.rings.map((ring) => ring.radius)) - section.halfRadial;
  const outer = Math.max(...rings.rings.map((ring) => ring.radius)) + section.halfRadial;
  return geometry.coil.winding.shape === 'bore' ? body.innerRadius - outer : inner - body.outerRadius;
}

/** Growth of the part towards the coil when hot, m on the radius; a bore grows away from the coil inside it. */
export function radialGrowth(geometry: Geometry, requirement: Requirement): number {
  if (!geometry.material) return 0;
  const alpha = expansion[geometry.material.family];
  const rise = requirement.process.targetTemperatureC - 20;
  const radius =
    geometry.coil.winding.shape === 'bore'
      ? -requirement.part.insideDiameter / 2
      : requirement.part.outsideDiameter / 2;
  const whole = alpha * rise * radius;
  // A thin hot layer is held back by the cold core.
  if (requirement.part.depthWanted === null) return whole;
  return whole * Math.min(1, (2 * requirement.part.depthWanted) / Math.abs(radius));
}

export function workingPressure(requirement: Requirement): number {
  return requirement.machine.water.supplyPressure ?? waterDefaults.supplyPressure;
}

/** Pressure that the hydrostatic line asks for, or 1.5 times the working pressure. */
export function testPressure(requirement: Requirement): number {
  const line = requirement.acceptance.find((one) => one.kind === 'hydrostatic');
  return line?.nominal ?? line?.low ?? testPressureFactor * workingPressure(requirement);
}

export function mechanicsFigures(
  requirement: Requirement,
  geometry: Geometry,
  path: CopperPath,
): Mechanics | null {
  const { section } = geometry;
  if (!section) return null;
  const gap = gapBetweenTurns(geometry);
  const cold = radialClearance(geometry);
  const wall = wallAfterBending(requirement.coil.tube.wall, path.bendRadius, bendingSize(section));
  const rating = pressureRating(requirement.coil.tube, wall);
  const square = requirement.coil.tube.kind !== 'round';
  return {
    clearanceBetweenTurns: Number.isFinite(gap) ? gap : null,
    radialClearanceCold: cold,
    radialClearanceHot:
      cold === null ? null : cold - radialGrowth(geometry, requirement) - (requirement.part.runout ?? 0) / 2,
    wallAfterBending: wall,
    workingPressureRating: figure(
      rating,
      'Pa',
      square
        ? 'plate bending of the flat wall, annealed copper 6000 psi'
        : 'Barlow, annealed copper 6000 psi',
      [
        {
          name: 'wall of the tube',
          variation: { value: 0.1 * wall, unit: 'm' },
          change: rating * (square ? 0.2 : 0.1),
        },
        { name: 'strength of the copper', variation: { value: 0.1, unit: '1' }, change: rating * 0.1 },
      ],
      {
        least: 0,
        assumptions: [
          'Allowable stress of annealed copper from memory (ASME B31): confirm with the code that applies.',
        ],
      },
    ),
    testPressure: testPressure(requirement),
  };
}
