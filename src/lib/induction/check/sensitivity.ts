/**
 * What the tolerances of coil, part and material do to inductance and resistance: differences of the preview solution
 * about the nominal point, at the nominal coil current (so the permeability of steel stays where it is).
 *
 * Resistivities need no solutions of their own. Scaling every resistivity and the frequency by one factor leaves the
 * fields as they are, so ∂/∂ln ρ_part = e − ∂/∂ln ρ_copper − ∂/∂ln f with e = 0 for L and 1 for R; and scaling the
 * saturation of steel by s is the same as scaling the current by 1/s: ∂/∂ln B_s = −∂/∂ln I.
 */
import type { Material } from '../materials/types.ts';
import { pointOf, type CoilShift, type CoilSource, type ModelPoint } from './coil-model.ts';
import type { Question, Solver } from './solver.ts';
import type { Coil, ImpedanceAnswer, TubeSection, Winding, Workpiece } from './types.ts';

/** Shop tolerances where none is entered (common practice). */
export const shopTolerances = {
  diameter: 0.5e-3,
  pitch: 0.3e-3,
  partDiameter: 0.1e-3,
  offset: 1e-3,
  tube: 0.05e-3,
  wallShare: 0.1,
  copperK: 20,
};

/** Adds to every clear opening of a winding. */
export function widened(winding: Winding, by: number): Winding {
  switch (winding.shape) {
    case 'helix':
    case 'single-turn':
      return winding.insideDiameter === null
        ? winding
        : { ...winding, insideDiameter: winding.insideDiameter + by };
    case 'conical':
      return {
        ...winding,
        insideDiameter: winding.insideDiameter + by,
        endInsideDiameter: winding.endInsideDiameter + by,
      };
    case 'stepped':
      return { ...winding, insideDiameters: winding.insideDiameters.map((d) => d + by) };
    case 'pancake':
      return { ...winding, insideDiameter: winding.insideDiameter + by };
    case 'bore':
      return winding.outsideDiameter === null
        ? winding
        : { ...winding, outsideDiameter: winding.outsideDiameter + by };
    case 'racetrack':
    case 'rectangular-helix':
    case 'channel':
      return { ...winding, insideLength: winding.insideLength + by, insideWidth: winding.insideWidth + by };
    case 'hairpin':
      return { ...winding, legGap: winding.legGap + by };
    case 'drawing':
      return winding;
  }
}

function stretched(winding: Winding, by: number): Winding | null {
  return 'pitch' in winding ? { ...winding, pitch: winding.pitch + by } : null;
}

function grown(tube: TubeSection, by: number): TubeSection {
  if (tube.kind === 'round') return { ...tube, outsideDiameter: tube.outsideDiameter + by };
  if (tube.kind === 'square') return { ...tube, side: tube.side + by };
  return { ...tube, axialWidth: tube.axialWidth + by, radialHeight: tube.radialHeight + by };
}

const logs = (p: ModelPoint): CoilShift => ({
  inductance: Math.log(p.inductance),
  coilResistance: Math.log(p.coilResistance),
  loadResistance: Math.log(p.loadResistance),
});
const combine = (a: CoilShift, b: CoilShift, f: (x: number, y: number) => number): CoilShift => ({
  inductance: f(a.inductance, b.inductance),
  coilResistance: f(a.coilResistance, b.coilResistance),
  loadResistance: f(a.loadResistance, b.loadResistance),
});
const times = (a: CoilShift, k: number): CoilShift => combine(a, a, (x) => x * k);

interface Variation {
  name: string;
  unit: 'm';
  amount: number;
  change: (coil: Coil, part: Workpiece | null, sign: number) => { coil: Coil; part: Workpiece | null };
}

function variations(coil: Coil, part: Workpiece | null, gapBetweenTurns: number): Variation[] {
  const t = shopTolerances;
  const list: Variation[] = [
    {
      name: 'coil opening',
      unit: 'm',
      amount: coil.diameterTolerance ?? t.diameter,
      change: (c, p, s) => ({ coil: { ...c, winding: widened(c.winding, s) }, part: p }),
    },
    {
      name: 'tube size',
      unit: 'm',
      amount: t.tube,
      change: (c, p, s) => ({ coil: { ...c, tube: grown(c.tube, s) }, part: p }),
    },
    {
      name: 'tube wall',
      unit: 'm',
      amount: t.wallShare * coil.tube.wall,
      change: (c, p, s) => ({ coil: { ...c, tube: { ...c.tube, wall: c.tube.wall + s } }, part: p }),
    },
  ];
  if (stretched(coil.winding, 0)) {
    list.push({
      name: 'pitch',
      unit: 'm',
      amount: coil.pitchTolerance ?? t.pitch,
      change: (c, p, s) => ({ coil: { ...c, winding: stretched(c.winding, s) ?? c.winding }, part: p }),
    });
  }
  if (part) {
    list.push({
      name: 'part diameter',
      unit: 'm',
      amount: part.diameterTolerance ?? t.partDiameter,
      change: (c, p, s) => ({ coil: c, part: p ? { ...p, outsideDiameter: p.outsideDiameter + s } : p }),
    });
  }
  // A step never closes the gap between turns.
  const most = gapBetweenTurns > 0 ? 0.4 * gapBetweenTurns : Infinity;
  return list
    .filter((v) => v.amount > 0)
    .map((v) =>
      v.name === 'pitch' || v.name === 'tube size' ? { ...v, amount: Math.min(v.amount, most) } : v,
    );
}

export interface SensitivityInput {
  question: Question;
  /** Answer of the question at the setting of the check. */
  nominal: ImpedanceAnswer;
  material: Material | null;
  magnetic: boolean;
  gapBetweenTurns: number;
  /** Central differences; one-sided ones in the preview. */
  central: boolean;
}

/** Every source of the coil's band in one state. */
export function coilSources(solver: Solver, input: SensitivityInput): CoilSource[] {
  const sources: CoilSource[] = [modelSource(input.nominal)];
  const base: Question = { ...input.question, setting: 'preview' };
  const nominal = solver.ask(base);
  if (!nominal) return sources;
  const centre = logs(pointOf(nominal));
  /** Half the change between the plus and the minus side of a step. */
  const slope = (plus: Question, minus: Question): CoilShift | null => {
    const up = solver.ask(plus);
    if (!input.central) return up ? combine(logs(pointOf(up)), centre, (a, b) => a - b) : null;
    const down = solver.ask(minus);
    if (up && down)
      return times(
        combine(logs(pointOf(up)), logs(pointOf(down)), (a, b) => a - b),
        0.5,
      );
    return up ? combine(logs(pointOf(up)), centre, (a, b) => a - b) : null;
  };
  for (const v of variations(base.coil, base.part, input.gapBetweenTurns)) {
    const at = (sign: number): Question => ({ ...base, ...v.change(base.coil, base.part, sign * v.amount) });
    const shift = slope(at(1), at(-1));
    if (shift) sources.push({ name: v.name, variation: { value: v.amount, unit: v.unit }, shift });
  }
  sources.push(...offsetSource(solver, base, centre), ...materialSources(base, input, slope));
  return sources;
}

function modelSource(answer: ImpedanceAnswer): CoilSource {
  return {
    name: 'error of the method',
    variation: { value: answer.inductanceError, unit: '1' },
    shift: {
      inductance: answer.inductanceError,
      coilResistance: answer.resistanceError,
      loadResistance: answer.resistanceError,
    },
  };
}

/** Second order about the middle: taken at the tolerance itself. */
function offsetSource(solver: Solver, base: Question, centre: CoilShift): CoilSource[] {
  if (!base.part) return [];
  const moved = solver.ask({
    ...base,
    part: { ...base.part, axialOffset: base.part.axialOffset + shopTolerances.offset },
  });
  if (!moved) return [];
  const shift = combine(logs(pointOf(moved)), centre, (a, b) => a - b);
  return [{ name: 'axial place of the part', variation: { value: shopTolerances.offset, unit: 'm' }, shift }];
}

function materialSources(
  base: Question,
  input: SensitivityInput,
  slope: (plus: Question, minus: Question) => CoilShift | null,
): CoilSource[] {
  const sources: CoilSource[] = [];
  const copperC = base.coil.copperTemperatureC ?? 40;
  const warmer = (k: number): Question => ({
    ...base,
    coil: { ...base.coil, copperTemperatureC: copperC + k * shopTolerances.copperK },
  });
  const copper = slope(warmer(1), warmer(-1));
  if (copper)
    sources.push({
      name: 'copper temperature',
      variation: { value: shopTolerances.copperK, unit: 'K' },
      shift: copper,
    });
  if (!base.part || !input.material) return sources;
  const step = 0.03;
  const perFrequency = slope(
    { ...base, frequency: base.frequency * (1 + step) },
    { ...base, frequency: base.frequency * (1 - step) },
  );
  if (perFrequency && copper) {
    // Copper follows 0.00393 per kelvin of its 20 °C value (IEC 60028).
    const copperStep = (0.00393 * shopTolerances.copperK) / (1 + 0.00393 * (copperC - 20));
    const one: CoilShift = { inductance: 0, coilResistance: 1, loadResistance: 1 };
    const perPart = combine(
      combine(one, times(perFrequency, 1 / step), (a, b) => a - b),
      times(copper, 1 / copperStep),
      (a, b) => a - b,
    );
    const scatter = input.material.records.resistivity.uncertainty;
    sources.push({
      name: 'resistivity of the part',
      variation: { value: scatter, unit: '1' },
      shift: times(perPart, scatter),
    });
  }
  if (input.magnetic) {
    const perCurrent = slope(
      { ...base, current: base.current * (1 + step) },
      { ...base, current: base.current * (1 - step) },
    );
    const scatter = input.material.records.magnetisation.uncertainty;
    if (perCurrent) {
      sources.push({
        name: 'magnetisation of the part',
        variation: { value: scatter, unit: '1' },
        shift: times(perCurrent, -scatter / step),
      });
    }
  }
  return sources;
}
