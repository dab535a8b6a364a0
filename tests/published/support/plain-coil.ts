import type { Coil, Leads, Winding } from '../../../src/lib/induction/check/types.ts';

/** A coil of round tube with everything that does not matter to the field left open. */
export function plainCoil(c: {
  winding: Winding;
  outsideDiameter: number;
  wall?: number;
  leads?: Leads;
}): Coil {
  return {
    winding: c.winding,
    tube: { kind: 'round', outsideDiameter: c.outsideDiameter, wall: c.wall ?? 0.001 },
    copperGrade: 'cu-etp',
    copperTemperatureC: 40,
    leads: c.leads ?? null,
    handing: {
      windingDirection: null,
      leadExit: null,
      leadAngleDeg: null,
      upEnd: null,
      firstTurnFromFace: null,
    },
    diameterTolerance: null,
    pitchTolerance: null,
    support: { kind: 'none', count: 0 },
    centreTap: false,
    insulation: { kind: 'none', thickness: 0 },
    waterCircuits: 1,
  };
}
