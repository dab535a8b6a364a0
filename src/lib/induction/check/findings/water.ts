import { boreOf } from '../../cooling/bore.ts';
import type { Rule } from '../context.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** water-short: the outlet passes its limit; more circuits, if they help. */
export const waterShort: Rule = (context) => {
  const { water, knownWater } = context;
  if (!water) return [];
  const outlet = water.outletTemperature;
  if (outlet.value <= knownWater.outletLimitC) return [];
  const boils = outlet.value >= 95;
  const now = context.requirement.coil.waterCircuits;
  const more = water.circuitsAdvised > now;
  return [
    finding({
      code: 'water-short',
      severity: boils ? 'blocker' : 'caution',
      safety: true,
      subject: 'coil.waterCircuits',
      figure: quantity(outlet.value, 'C'),
      limit: quantity(knownWater.outletLimitC, 'C'),
      template:
        'With {flow} for {duty} the water leaves at {figure}, above its limit of {limit}, running continuously.',
      values: { flow: quantity(water.flow.value, 'm3/s'), duty: quantity(water.duty.value, 'W') },
      remedy: more
        ? `${water.circuitsAdvised} parallel circuits would do.`
        : 'More flow or pressure, a larger bore, or pauses between parts.',
      fixes: more
        ? [
            {
              label: `Take ${water.circuitsAdvised} circuits`,
              field: 'coil.waterCircuits',
              value: water.circuitsAdvised,
            },
          ]
        : [],
      source: 'heat balance of the water',
    }),
  ];
};

/** water-short: the flow entered needs more pressure than the machine has. */
export const waterPressureShort: Rule = (context) => {
  const { water } = context;
  const { flow, supplyPressure, returnPressure } = context.requirement.machine.water;
  if (!water || flow === null || supplyPressure === null || returnPressure === null) return [];
  const available = supplyPressure - returnPressure;
  const needed = water.pressureDrop;
  if (needed.value <= available) return [];
  return [
    finding({
      code: 'water-short',
      severity: 'caution',
      safety: true,
      subject: 'machine.water.flow',
      figure: quantity(needed.value, 'Pa'),
      limit: quantity(available, 'Pa'),
      template: 'The flow of {flow} needs {figure} through this coil; the machine has {limit}.',
      values: { flow: quantity(flow, 'm3/s') },
      remedy:
        'More circuits or a larger bore let the flow through; leave the flow empty to have it computed.',
      source: needed.method,
    }),
  ];
};

/** water-short: no water at all, by the pressures or flow entered or a conductor without bore. */
export const noWater: Rule = (context) => {
  if (context.water || !context.fittedRow || !context.path) return [];
  const solid = boreOf(context.requirement.coil.tube) === null;
  return [
    finding({
      code: 'water-short',
      severity: 'blocker',
      safety: true,
      subject: solid ? 'coil.tube.wall' : 'machine.water',
      template: solid
        ? 'The conductor has no bore: it cannot be cooled by water.'
        : 'No water flows by the pressures or the flow entered: the coil would burn out.',
      remedy: solid
        ? 'Take a tube, or braze a cooling tube to the conductor and enter that.'
        : 'Enter a supply pressure above the return pressure, or the flow.',
      source: 'heat balance of the water',
    }),
  ];
};

/** water-hot: the wall of the bore is hot enough for scale and vapour. */
export const waterHot: Rule = (context) => {
  const wall = context.water?.wallTemperature.value;
  if (wall === undefined || wall <= 80) return [];
  return [
    finding({
      code: 'water-hot',
      severity: 'caution',
      safety: true,
      subject: 'coil.tube',
      figure: quantity(wall, 'C'),
      limit: quantity(80, 'C'),
      template:
        'The wall of the bore reaches {figure}: above {limit} scale forms and vapour films come near.',
      remedy: 'Faster water, a larger tube, or more turns at less current.',
      source: commonPractice,
    }),
  ];
};

/** water-fast: erosion and noise. */
export const waterFast: Rule = (context) => {
  const v = context.water?.velocity.value;
  if (v === undefined || v <= 2.5) return [];
  // A flow computed from the pressures alone leaves hoses and fittings out: it is seldom reached.
  const far = v > 4 && context.requirement.machine.water.flow !== null;
  return [
    finding({
      code: 'water-fast',
      severity: far ? 'caution' : 'note',
      subject: 'machine.water',
      figure: quantity(v, 'm/s'),
      limit: quantity(far ? 4 : 2.5, 'm/s'),
      template: 'The water runs at {figure}; above {limit} it wears copper at bends.',
      remedy:
        'Throttle the flow, or take a larger bore; hoses and fittings, which are not included, take their share.',
      source: `${commonPractice}: 1 to 2.5 m/s`,
    }),
  ];
};

/** water-laminar: poor heat transfer below the critical Reynolds number. */
export const waterLaminar: Rule = (context) => {
  const { water } = context;
  if (!water || !water.pressureDrop.method.includes('laminar')) return [];
  return [
    finding({
      code: 'water-laminar',
      severity: 'caution',
      subject: 'machine.water',
      figure: quantity(water.reynolds.value, '1'),
      template:
        'The flow is laminar (Reynolds number {figure}): it cools the wall poorly, and correlations spread most here.',
      remedy: 'More flow makes it turbulent.',
      source: 'Ito 1959, critical Reynolds number of coiled tube',
    }),
  ];
};

/** flow-below-interlock: the machine will not run with this coil. */
export const belowInterlock: Rule = (context) => {
  const { water } = context;
  const limit = context.requirement.machine.water.interlockFlow;
  if (!water || limit === null || water.flow.low >= limit) return [];
  const off = water.flow.value < limit;
  return [
    finding({
      code: 'flow-below-interlock',
      severity: off ? 'blocker' : 'caution',
      subject: 'machine.water.interlockFlow',
      figure: quantity(off ? water.flow.value : water.flow.low, 'm3/s'),
      limit: quantity(limit, 'm3/s'),
      limitIsLeast: true,
      template: off
        ? 'The coil passes {figure}; the machine’s interlock asks for {limit} and will not let it run.'
        : 'The coil may pass as little as {figure}; the machine’s interlock asks for {limit}.',
      remedy: 'Parallel circuits, a larger bore, or a booster pump.',
      source: 'interlock of the machine',
    }),
  ];
};
