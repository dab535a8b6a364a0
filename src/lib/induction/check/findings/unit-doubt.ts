import type { CheckContext, Rule } from '../context.ts';
import type { Finding, Unit } from '../types.ts';
import { finding, quantity } from './finding.ts';

interface Doubt {
  field: string;
  name: string;
  value: number;
  unit: Unit;
  /** What usually is. */
  usual: [number, number];
}

/** Factors by which units are mistaken. */
const factors = [10, 25.4, 1000, 1e6];

/** The factor that brings a value into what is usual, if one of the well-known ones does. */
export function mistakenFactor(value: number, [low, high]: readonly [number, number]): number | null {
  if (!(value > 0) || (value >= low && value <= high)) return null;
  for (const factor of factors) {
    const moved = value > high ? value / factor : value * factor;
    if (moved >= low && moved <= high) return value > high ? 1 / factor : factor;
  }
  return null;
}

function doubts(context: CheckContext): Doubt[] {
  const { part, coil, machine } = context.requirement;
  const list: Doubt[] = [];
  const add = (field: string, name: string, value: number | null, unit: Unit, usual: [number, number]) => {
    if (value !== null) list.push({ field, name, value, unit, usual });
  };
  add('part.outsideDiameter', 'outside diameter of the part', part.outsideDiameter, 'm', [1e-3, 1.5]);
  add('part.length', 'length of the part', part.length, 'm', [5e-4, 6]);
  const w = coil.winding;
  // Openings are measured against the part they hold.
  if ((w.shape === 'helix' || w.shape === 'single-turn') && w.insideDiameter !== null) {
    add('coil.winding.insideDiameter', 'inside diameter of the coil', w.insideDiameter, 'm', [
      part.outsideDiameter,
      6 * part.outsideDiameter,
    ]);
  }
  const tube = coil.tube;
  const size =
    tube.kind === 'round' ? tube.outsideDiameter : tube.kind === 'square' ? tube.side : tube.radialHeight;
  const sizeField =
    tube.kind === 'round' ? 'outsideDiameter' : tube.kind === 'square' ? 'side' : 'radialHeight';
  add(`coil.tube.${sizeField}`, 'tube size', size, 'm', [1.5e-3, 0.06]);
  add('coil.tube.wall', 'tube wall', tube.wall, 'm', [0.02 * size, size / 2]);
  if ('pitch' in w) add('coil.winding.pitch', 'pitch', w.pitch, 'm', [0.9 * size, 8 * size]);
  add('machine.supply.frequencyMin', 'lowest frequency', machine.supply.frequencyMin, 'Hz', [40, 5e6]);
  add('machine.supply.frequencyMax', 'highest frequency', machine.supply.frequencyMax, 'Hz', [45, 3e7]);
  add('machine.supply.ratedPower', 'rated power', machine.supply.ratedPower, 'W', [50, 1e7]);
  add(
    'machine.water.supplyPressure',
    'water supply pressure',
    machine.water.supplyPressure,
    'Pa',
    [2e4, 2.5e6],
  );
  add('machine.water.flow', 'water flow', machine.water.flow, 'm3/s', [2e-6, 5e-2]);
  if (part.depthWanted !== null)
    add('part.depthWanted', 'depth wanted', part.depthWanted, 'm', [5e-5, part.outsideDiameter / 2]);
  return list;
}

/** unit-doubt: a value a factor 10, 25.4, 1000 or a million from what fits. */
export const unitDoubts: Rule = (context) => {
  const out: Finding[] = [];
  const say = (doubt: Doubt, factor: number) => {
    const meant = Number((doubt.value * factor).toPrecision(6));
    out.push(
      finding({
        code: 'unit-doubt',
        severity: 'caution',
        subject: doubt.field,
        figure: quantity(doubt.value, doubt.unit),
        template: `The ${doubt.name} of {figure} is unusual: did you mean {meant}?`,
        values: { meant: quantity(meant, doubt.unit) },
        remedy: 'Check the unit it was typed in.',
        fixes: [{ label: 'Take the other reading', field: doubt.field, value: meant }],
        source: 'range of usual values',
      }),
    );
  };
  if (context.geometry.notNumbers.length > 0) return [];
  for (const doubt of doubts(context)) {
    const factor = mistakenFactor(doubt.value, doubt.usual);
    if (factor !== null) say(doubt, factor);
  }
  const capacitance = capacitanceDoubt(context);
  if (capacitance) say(capacitance.doubt, capacitance.factor);
  return out;
};

/** A frequency about √1000 off the supply's range: nF, µF and mF mistaken. */
function capacitanceDoubt(context: CheckContext): { doubt: Doubt; factor: number } | null {
  const { supply, bank } = context.requirement.machine;
  const hot = context.tank?.resonanceHot.value;
  const { frequencyMin, frequencyMax } = supply;
  if (hot === undefined || frequencyMin === null || frequencyMax === null) return null;
  const factor = hot > frequencyMax ? 1000 : hot < frequencyMin ? 1 / 1000 : null;
  if (factor === null) return null;
  const moved = hot / Math.sqrt(factor);
  if (moved < frequencyMin * 0.7 || moved > frequencyMax * 1.4) return null;
  const group = bank.kind === 'groups' ? bank.groups[0] : bank.totals[0];
  if (!group) return null;
  const value = 'unitCapacitance' in group ? group.unitCapacitance : group.capacitance;
  const field =
    bank.kind === 'groups' ? 'machine.bank.groups.0.unitCapacitance' : 'machine.bank.totals.0.capacitance';
  return {
    doubt: { field, name: 'capacitance', value, unit: 'F', usual: [value * 10, value * 1e6] },
    factor,
  };
}
