/** From the requirement to what can be solved: open sizes filled in, impossible ones refused with a reason. */
import { partBody, ringCoil, isAxisymmetric, type PartBody, type RingCoil } from '../coil/rings.ts';
import { sectionOf, type Section } from '../coil/section.ts';
import { InductionInputError } from '../input-error.ts';
import { materialOf } from '../materials/material-of.ts';
import type { Material } from '../materials/types.ts';
import type { Coil, Requirement, ResolvedCoil, Winding, Workpiece } from './types.ts';

export interface Geometry {
  /** Coil with every size explicit. */
  coil: Coil;
  section: Section | null;
  /** null for coils that are not round about one axis, and where the geometry is impossible. */
  rings: RingCoil | null;
  resolved: ResolvedCoil | null;
  /** Part as it is solved; null where the method has no part (shape, drawing, non-conductor, impossible). */
  part: Workpiece | null;
  body: PartBody | null;
  material: Material | null;
  /** What the solver's geometry refused. */
  problems: InductionInputError[];
  /** Paths of numbers that are not numbers. */
  notNumbers: string[];
}

/** Paths of values that are NaN or infinite anywhere in the requirement. */
export function notFinite(value: unknown, path = ''): string[] {
  if (typeof value === 'number') return Number.isFinite(value) ? [] : [path];
  if (Array.isArray(value)) return value.flatMap((one, index) => notFinite(one, `${path}.${index}`));
  if (value !== null && typeof value === 'object') {
    return Object.entries(value).flatMap(([key, one]) =>
      notFinite(one, path === '' ? key : `${path}.${key}`),
    );
  }
  return [];
}

/** Fills clear openings that are given by the part and a clearance. */
export function explicitWinding(winding: Winding, part: Workpiece): Winding {
  if ((winding.shape === 'helix' || winding.shape === 'single-turn') && winding.insideDiameter === null) {
    if (winding.clearance === null) return winding;
    return { ...winding, insideDiameter: part.outsideDiameter + 2 * winding.clearance };
  }
  if (winding.shape === 'bore' && winding.outsideDiameter === null && winding.clearance !== null) {
    return { ...winding, outsideDiameter: part.insideDiameter - 2 * winding.clearance };
  }
  return winding;
}

export function resolveGeometry(requirement: Requirement): Geometry {
  const problems: InductionInputError[] = [];
  const attempt = <T>(work: () => T): T | null => {
    try {
      return work();
    } catch (error) {
      if (!(error instanceof InductionInputError)) throw error;
      problems.push(error);
      return null;
    }
  };
  const notNumbers = notFinite(requirement);
  const coil: Coil = {
    ...requirement.coil,
    winding: explicitWinding(requirement.coil.winding, requirement.part),
  };
  const empty: Geometry = {
    coil,
    section: null,
    rings: null,
    resolved: null,
    part: null,
    body: null,
    material: null,
    problems,
    notNumbers,
  };
  if (notNumbers.length > 0) return empty;
  const section = attempt(() => sectionOf(coil.tube));
  const round = isAxisymmetric(coil.winding);
  const rings = section && round ? attempt(() => ringCoil(coil, requirement.part)) : null;
  const material = attempt(() =>
    materialOf(requirement.part.material, requirement.process.targetTemperatureC),
  );
  const solvable =
    rings !== null && material !== null && material.conducts && requirement.part.form !== 'drawing';
  const body = solvable ? attempt(() => partBody(requirement.part, coil, rings)) : null;
  return {
    ...empty,
    section,
    rings,
    material,
    resolved: section ? resolvedCoil(coil, section, rings) : null,
    part: body ? requirement.part : null,
    body,
  };
}

function resolvedCoil(coil: Coil, section: Section, rings: RingCoil | null): ResolvedCoil | null {
  const w = coil.winding;
  if (rings) {
    const radii = rings.rings.map((ring) => ring.radius);
    const places = rings.rings.map((ring) => ring.z);
    return {
      turns: rings.turns,
      insideDiameter: 2 * (Math.min(...radii) - section.halfRadial),
      outsideDiameter: 2 * (Math.max(...radii) + section.halfRadial),
      length: Math.max(...places) - Math.min(...places) + 2 * section.halfAxial,
      pitch: rings.pitch,
    };
  }
  if (w.shape === 'racetrack' || w.shape === 'rectangular-helix' || w.shape === 'channel') {
    if (w.turns === null) return null;
    return {
      turns: w.turns,
      insideDiameter: w.insideWidth,
      outsideDiameter: w.insideWidth + 4 * section.halfRadial,
      length: (w.turns - 1) * w.pitch + 2 * section.halfAxial,
      pitch: w.pitch,
    };
  }
  if (w.shape === 'hairpin') {
    if (w.turns === null) return null;
    return {
      turns: w.turns,
      insideDiameter: w.legGap,
      outsideDiameter: w.legGap + 4 * section.halfRadial,
      length: w.length,
      pitch: w.pitch,
    };
  }
  return null;
}
