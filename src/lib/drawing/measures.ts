/**
 * What of a requirement can be drawn: values that are sound, in millimetres, with stand-ins for what is
 * open. A form half filled in is the usual case here, so nothing throws.
 */
import type { Coil, Fixture, TubeSection, Winding, Workpiece } from '../induction/check/types.ts';

/** Metres to millimetres if it is a sound length (1 µm ≤ x ≤ 100 m), else null. */
export function millimetres(metres: number | null | undefined): number | null {
  return typeof metres === 'number' && Number.isFinite(metres) && metres >= 1e-6 && metres <= 100
    ? metres * 1000
    : null;
}

export interface DrawnTube {
  kind: 'round' | 'rectangular';
  /** Along the axis and across it. */
  width: number;
  height: number;
  wall: number;
  cornerRadius: number;
}

export interface DrawnPart {
  outside: number;
  inside: number;
  length: number;
  heated: number | null;
  offset: number;
}

/** A winding that goes around an axis: radius of its centre line as a function of the turn count. */
export interface DrawnWinding {
  turns: number;
  /** Turns were open, or more than are worth drawing. */
  turnsAssumed: boolean;
  pitch: number;
  /** Centre-line radius after n turns, 0 ≤ n ≤ turns. */
  radiusAt: (n: number) => number;
}

export interface Lettering {
  inch: boolean;
}

/** A length in the drawing's unit: "25.4 mm" or "1 in", trailing zeros dropped. */
export function lengthText(mm: number, { inch }: Lettering, prefix = ''): string {
  return inch
    ? `${prefix}${Number((mm / 25.4).toFixed(3))} in`
    : `${prefix}${Number(mm.toFixed(mm < 10 ? 2 : 1))} mm`;
}

const fallbackTube: DrawnTube = { kind: 'round', width: 8, height: 8, wall: 1, cornerRadius: 4 };

export function drawnTube(tube: TubeSection, notes: string[]): DrawnTube {
  const wall = millimetres(tube.wall);
  let drawn: DrawnTube | null = null;
  if (tube.kind === 'round') {
    const diameter = millimetres(tube.outsideDiameter);
    if (diameter)
      drawn = { kind: 'round', width: diameter, height: diameter, wall: 0, cornerRadius: diameter / 2 };
  } else {
    const width = millimetres(tube.kind === 'square' ? tube.side : tube.axialWidth);
    const height = millimetres(tube.kind === 'square' ? tube.side : tube.radialHeight);
    if (width && height) {
      drawn = {
        kind: 'rectangular',
        width,
        height,
        wall: 0,
        cornerRadius: millimetres(tube.cornerRadius) ?? 0,
      };
    }
  }
  if (!drawn) {
    notes.push('The tube is not given yet; a round tube of 8 mm is drawn in its place.');
    return fallbackTube;
  }
  // A wall thicker than half the tube leaves no bore: drawn solid.
  return { ...drawn, wall: Math.min(wall ?? 0, drawn.width / 2, drawn.height / 2) };
}

export function drawnPart(part: Workpiece): DrawnPart | null {
  const outside = millimetres(part.outsideDiameter);
  const length = millimetres(part.length);
  if (!outside || !length || part.form === 'drawing') return null;
  const inside = Math.min(millimetres(part.insideDiameter) ?? 0, outside);
  const heated = millimetres(part.heatedLength);
  const offset = Number.isFinite(part.axialOffset) ? part.axialOffset * 1000 : 0;
  return { outside, inside, length, heated: heated && heated < length ? heated : null, offset };
}

/** Clear opening of a winding about the part; null where neither is given. */
function opening(
  insideDiameter: number | null,
  clearance: number | null,
  part: DrawnPart | null,
  notes: string[],
): number | null {
  const given = millimetres(insideDiameter);
  if (given) return given;
  const gap =
    typeof clearance === 'number' && Number.isFinite(clearance) && clearance >= 0 ? clearance * 1000 : null;
  if (part && gap !== null) return part.outside + 2 * gap;
  if (part) {
    notes.push('The opening is not given yet; it is drawn 10 % wider than the part.');
    return part.outside * 1.1;
  }
  return null;
}

const mostTurns = 60;

function countTurns(turns: number | null, notes: string[]): { turns: number; turnsAssumed: boolean } {
  if (turns === null || !Number.isFinite(turns) || turns < 0.5) {
    notes.push('The number of turns is open; four are drawn.');
    return { turns: 4, turnsAssumed: true };
  }
  if (turns > mostTurns) {
    notes.push(`Only ${mostTurns} of the turns are drawn.`);
    return { turns: mostTurns, turnsAssumed: true };
  }
  return { turns, turnsAssumed: false };
}

function soundPitch(pitch: number, across: number, notes: string[]): number {
  const given = millimetres(pitch);
  if (given) return given;
  notes.push('The pitch is not given yet; one and a half tubes are drawn.');
  return across * 1.5;
}

/** The winding of a coil about an axis (helix, cone, steps, single turn, bore); null where it has none. */
export function drawnWinding(
  winding: Winding,
  tube: DrawnTube,
  part: DrawnPart | null,
  leadSpacing: number,
  notes: string[],
): DrawnWinding | null {
  const half = tube.height / 2;
  switch (winding.shape) {
    case 'helix': {
      const clear = opening(winding.insideDiameter, winding.clearance, part, notes);
      if (!clear) return null;
      const radius = clear / 2 + half;
      return {
        ...countTurns(winding.turns, notes),
        pitch: soundPitch(winding.pitch, tube.width, notes),
        radiusAt: () => radius,
      };
    }
    case 'single-turn': {
      const clear = opening(winding.insideDiameter, winding.clearance, part, notes);
      if (!clear) return null;
      const radius = clear / 2 + half;
      return {
        turns: 1,
        turnsAssumed: false,
        pitch: Math.max(leadSpacing, tube.width),
        radiusAt: () => radius,
      };
    }
    case 'bore': {
      const over = millimetres(winding.outsideDiameter);
      const gap = millimetres(winding.clearance);
      const outside =
        over ?? (part && part.inside > 0 ? part.inside - 2 * (gap ?? part.inside * 0.05) : null);
      if (!outside || outside <= tube.height) return null;
      const radius = outside / 2 - half;
      return {
        ...countTurns(winding.turns, notes),
        pitch: soundPitch(winding.pitch, tube.width, notes),
        radiusAt: () => radius,
      };
    }
    case 'conical': {
      const start = millimetres(winding.insideDiameter);
      const end = millimetres(winding.endInsideDiameter) ?? start;
      if (!start || !end) return null;
      const counted = countTurns(winding.turns, notes);
      return {
        ...counted,
        pitch: soundPitch(winding.pitch, tube.width, notes),
        // The first and the last turn have the diameters given, as the check counts them.
        radiusAt: (n) => {
          const share = (n - 0.5) / Math.max(1, counted.turns - 1);
          return (start + (end - start) * Math.min(1, Math.max(0, share))) / 2 + half;
        },
      };
    }
    case 'stepped': {
      const steps = (winding.insideDiameters ?? [])
        .map(millimetres)
        .filter((step) => step !== null)
        .slice(0, mostTurns);
      if (steps.length === 0) return null;
      return {
        turns: steps.length,
        turnsAssumed: false,
        pitch: soundPitch(winding.pitch, tube.width, notes),
        radiusAt: (n) =>
          (steps[Math.max(0, Math.min(steps.length - 1, Math.floor(n - 1e-9)))] ?? 0) / 2 + half,
      };
    }
    default:
      return null;
  }
}

/** What the views are drawn from. */
export interface DrawingInput {
  coil: Coil;
  part: Workpiece;
  fixture?: Fixture;
}

export interface DrawnLeads {
  length: number;
  spacing: number;
  given: boolean;
}

/** Leads as given, or short stubs so that the drawing shows where they leave. */
export function drawnLeads(coil: Coil, tube: DrawnTube): DrawnLeads {
  const length = millimetres(coil.leads?.length);
  const spacing = millimetres(coil.leads?.spacing);
  return {
    length: length ?? tube.width * 4,
    spacing: Math.max(spacing ?? tube.width * 1.5, tube.width),
    given: length !== null && spacing !== null,
  };
}

export { countTurns, soundPitch };
