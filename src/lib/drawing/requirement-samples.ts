/** Invented requirements to draw in tests and in the gallery of components. */
import type { Coil, Workpiece, Winding } from '../induction/check/types.ts';

export const samplePart: Workpiece = {
  material: { kind: 'library', id: '42crmo4' },
  form: 'cylinder',
  outsideDiameter: 0.025,
  insideDiameter: 0,
  length: 0.09,
  diameterTolerance: null,
  weighedMass: null,
  heatedLength: 0.05,
  depthWanted: 0.002,
  axialOffset: 0,
  runout: null,
  rotation: true,
};

export const sampleCoil: Coil = {
  winding: { shape: 'helix', insideDiameter: 0.035, clearance: null, turns: 5, pitch: 0.013 },
  tube: { kind: 'round', outsideDiameter: 0.01, wall: 0.001 },
  copperGrade: 'cu-of',
  copperTemperatureC: null,
  leads: { length: 0.06, spacing: 0.02 },
  handing: {
    windingDirection: 'right',
    leadExit: 'radial',
    leadAngleDeg: 0,
    upEnd: 'horizontal',
    firstTurnFromFace: 0.08,
  },
  diameterTolerance: 0.0005,
  pitchTolerance: 0.0005,
  support: { kind: 'studs', count: 3 },
  centreTap: false,
  insulation: { kind: 'none', thickness: 0 },
  waterCircuits: 1,
};

export function coilOf(winding: Winding, changes: Partial<Coil> = {}): Coil {
  return { ...sampleCoil, ...changes, winding };
}

/** One winding of every shape that can be drawn. */
export const sampleWindings: Winding[] = [
  { shape: 'helix', insideDiameter: 0.035, clearance: null, turns: 5, pitch: 0.013 },
  { shape: 'conical', insideDiameter: 0.034, endInsideDiameter: 0.06, turns: 4, pitch: 0.014 },
  { shape: 'stepped', insideDiameters: [0.034, 0.034, 0.05, 0.05], pitch: 0.014 },
  { shape: 'single-turn', insideDiameter: 0.032, clearance: null },
  { shape: 'pancake', insideDiameter: 0.02, turns: 4, pitch: 0.013, faceGap: 0.004 },
  { shape: 'bore', outsideDiameter: 0.034, clearance: null, turns: 4, pitch: 0.012 },
  { shape: 'racetrack', insideLength: 0.12, insideWidth: 0.04, cornerRadius: 0.02, turns: 3, pitch: 0.013 },
  {
    shape: 'rectangular-helix',
    insideLength: 0.09,
    insideWidth: 0.05,
    cornerRadius: 0.01,
    turns: 3,
    pitch: 0.013,
  },
  { shape: 'hairpin', length: 0.12, legGap: 0.012, turns: 1, pitch: 0.012 },
  { shape: 'channel', insideLength: 0.14, insideWidth: 0.035, crossingHeight: 0.04, turns: 1, pitch: 0.012 },
];
