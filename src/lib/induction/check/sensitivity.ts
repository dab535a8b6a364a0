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
  /** Central differences where the step is not small against the gap; else one side, within 1 % of it. */
  central: boolean;
  copperOnly: boolean;
  unit: 'm';
  amount: number;
  change: (coil: Coil, part: Workpiece | null, sign: number) => { coil: Coil; part: Workpiece | null };
}

/**
 * Tolerances that act on the copper alone (size and wall of the tube) are taken from the bare coil, those that act on
 * the gap from the loaded one.
 */
function variations(coil: Coil, part: Workpiece | null, gapBetweenTurns: number): Variation[] {
  const t = shopTolerances;
  const list: Variation[] = [
    {
      name: 'coil opening',
      central: true,
      copperOnly: false,
      unit: 'm',
      amount: coil.diameterTolerance ?? t.diameter,
      change: (c, p, s) => ({ coil: { ...c, winding: widened(c.winding, s) }, part: p }),
    },
    {
      name: 'tube size',
      central: false,
      copperOnly: true,
      unit: 'm',
      amount: t.tube,
      change: (c, p, s) => ({ coil: { ...c, tube: grown(c.tube, s) }, part: p }),
    },
    {
      name: 'tube wall',
      central: false,
      copperOnly: true,
      unit: 'm',
      amount: t.wallShare * coil.tube.wall,
      change: (c, p, s) => ({ coil: { ...c, tube: { ...c.tube, wall: c.tube.wall + s } }, part: p }),
    },
  ];
  if (stretched(coil.winding, 0)) {
    list.push({
      name: 'pitch',
      central: false,
      copperOnly: false,
      unit: 'm',
      amount: coil.pitchTolerance ?? t.pitch,
      change: (c, p, s) => ({ coil: { ...c, winding: stretched(c.winding, s) ?? c.winding }, part: p }),
    });
  }
  if (part) {
    list.push({
      name: 'part diameter',
      central: false,
      copperOnly: false,
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
}

/** ln of the preview solution at a moved question less that at the base; null where it is refused. */
type Difference = (moved: Question, base?: Question) => CoilShift | null;

/** Every source of the coil's band in one state. */
export function coilSources(solver: Solver, input: SensitivityInput): CoilSource[] {
  const sources: CoilSource[] = [modelSource(input.nominal)];
  const base: Question = { ...input.question, setting: 'preview' };
  const known = new Map<Question, CoilShift | null>();
  const logsOf = (question: Question): CoilShift | null => {
    const before = known.get(question);
    if (before !== undefined) return before;
    const answer = solver.askNearby(question);
    const value = answer ? logs(pointOf(answer)) : null;
    known.set(question, value);
    return value;
  };
  if (!logsOf(base)) return sources;
  const bare: Question = base.part ? { ...base, part: null, state: 'cold', current: 1 } : base;
  const difference: Difference = (moved, from = base) => {
    const a = logsOf(moved);
    const b = logsOf(from);
    return a && b ? combine(a, b, (x, y) => x - y) : null;
  };
  for (const v of variations(base.coil, base.part, input.gapBetweenTurns)) {
    const from = v.copperOnly ? bare : base;
    const at = (sign: number): Question => ({ ...from, ...v.change(from.coil, from.part, sign * v.amount) });
    let shift = difference(at(1), from);
    if (shift && v.central) {
      const down = difference(at(-1), from);
      if (down)
        shift = times(
          combine(shift, down, (a, b) => a - b),
          0.5,
        );
    }
    if (shift)
      sources.push({
        name: v.name,
        variation: { value: v.amount, unit: v.unit },
        shift: v.copperOnly ? withoutLoad(shift) : shift,
      });
  }
  sources.push(...offsetSource(base, difference), ...materialSources(base, bare, input, difference));
  return sources;
}

const withoutLoad = (shift: CoilShift): CoilShift => ({ ...shift, loadResistance: 0 });

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
function offsetSource(base: Question, difference: Difference): CoilSource[] {
  if (!base.part) return [];
  const part = { ...base.part, axialOffset: base.part.axialOffset + shopTolerances.offset };
  const shift = difference({ ...base, part });
  return shift
    ? [{ name: 'axial place of the part', variation: { value: shopTolerances.offset, unit: 'm' }, shift }]
    : [];
}

function materialSources(
  base: Question,
  bare: Question,
  input: SensitivityInput,
  difference: Difference,
): CoilSource[] {
  const sources: CoilSource[] = [];
  const copperC = base.coil.copperTemperatureC ?? 40;
  const warm = shopTolerances.copperK;
  const warmer = { ...bare, coil: { ...bare.coil, copperTemperatureC: copperC + warm } };
  const found = difference(warmer, bare);
  const copper = found && withoutLoad(found);
  if (copper)
    sources.push({ name: 'copper temperature', variation: { value: warm, unit: 'K' }, shift: copper });
  if (!base.part || !input.material) return sources;
  const step = 0.03;
  const perFrequency = difference({ ...base, frequency: base.frequency * (1 + step) });
  if (perFrequency && copper) {
    // Copper follows 0.00393 per kelvin of its 20 °C value (IEC 60028).
    const copperStep = (0.00393 * warm) / (1 + 0.00393 * (copperC - 20));
    const one: CoilShift = { inductance: 0, coilResistance: 1, loadResistance: 1 };
    const perLn = times(perFrequency, 1 / Math.log(1 + step));
    const perPart = combine(
      combine(one, perLn, (a, b) => a - b),
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
    const perCurrent = difference({ ...base, current: base.current * (1 + step) });
    const scatter = input.material.records.magnetisation.uncertainty;
    if (perCurrent) {
      sources.push({
        name: 'magnetisation of the part',
        variation: { value: scatter, unit: '1' },
        shift: times(perCurrent, -scatter / Math.log(1 + step)),
      });
    }
  }
  return sources;
}
