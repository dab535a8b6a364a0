/** Copper and water: heat taken up, flow, temperatures. */
import { boreOf } from '../cooling/bore.ts';
import {
  circuitsAdvised,
  flowAtPressure,
  flowThrough,
  temperatureRise,
  wallTemperature,
  type Passage,
} from '../cooling/passage.ts';
import type { CopperPath } from '../shop/path.ts';
import type { Assumption } from './assume.ts';
import { figure, type Effect } from './figure.ts';
import type { Coil, CoolingSupply, Figure, WaterFigures } from './types.ts';

export const waterDefaults = { inletC: 25, supplyPressure: 4e5, returnPressure: 1e5, outletLimitC: 50 };
/** Largest rise of the trade where no outlet limit is nearer, K (common practice: 10 to 25 K). */
const mostRise = 25;

export interface WaterSupplyKnown {
  inletC: number;
  differential: number;
  flow: number | null;
  outletLimitC: number;
  assumptions: Assumption[];
}

/** Fills what is not known of the water with stated defaults. */
export function assumeWater(water: CoolingSupply): WaterSupplyKnown {
  const assumptions: Assumption[] = [];
  const note = (
    field: keyof CoolingSupply,
    name: string,
    value: number,
    unit: 'C' | 'Pa',
    howToFind: string,
  ) =>
    assumptions.push({
      field: `machine.water.${field}`,
      name,
      value: { value, unit },
      band: 0.3,
      severity: 'note',
      howToFind,
    });
  const d = waterDefaults;
  if (water.inletTemperatureC === null)
    note('inletTemperatureC', 'water inlet temperature', d.inletC, 'C', 'Read it at the machine in summer.');
  if (water.outletLimitC === null)
    note(
      'outletLimitC',
      'outlet limit of the water',
      d.outletLimitC,
      'C',
      'Ask the supply’s maker; 50 °C is common practice.',
    );
  if (water.flow === null) {
    if (water.supplyPressure === null)
      note(
        'supplyPressure',
        'water supply pressure',
        d.supplyPressure,
        'Pa',
        'Read the gauge at the machine while it runs.',
      );
    if (water.returnPressure === null)
      note(
        'returnPressure',
        'water return pressure',
        d.returnPressure,
        'Pa',
        'Read the gauge at the machine while it runs.',
      );
  }
  return {
    inletC: water.inletTemperatureC ?? d.inletC,
    differential: (water.supplyPressure ?? d.supplyPressure) - (water.returnPressure ?? d.returnPressure),
    flow: water.flow,
    outletLimitC: water.outletLimitC ?? d.outletLimitC,
    assumptions,
  };
}

export interface WaterInput {
  coil: Coil;
  path: CopperPath;
  water: WaterSupplyKnown;
  /** Heat of copper and leads, W, and from the part, W, each with half bands. */
  copperHeat: { value: number; band: number };
  partHeat: { value: number; band: number };
  /** Share of each turn in the coil's own loss. */
  turnLossShare: readonly number[];
}

/** One of `circuits` parallel ways through the coil; null for a solid conductor. */
export function passageOf(coil: Coil, path: CopperPath, circuits: number): Passage | null {
  const bore = boreOf(coil.tube);
  if (!bore) return null;
  const length = (path.windingLength + 2 * (coil.leads?.length ?? 0)) / Math.max(1, circuits);
  return { ...bore, length, coilDiameter: path.coilDiameter };
}

export function waterFigures(input: WaterInput): WaterFigures | null {
  const { coil, path, water } = input;
  const passage = passageOf(coil, path, coil.waterCircuits);
  if (!passage) return null;
  const duty = input.copperHeat.value + input.partHeat.value;
  const dutyEffects: Effect[] = [
    {
      name: 'loss in copper and leads',
      variation: { value: input.copperHeat.band, unit: 'W' },
      change: input.copperHeat.band,
    },
    {
      name: 'heat from the part',
      variation: { value: input.partHeat.band, unit: 'W' },
      change: input.partHeat.band,
    },
  ];
  const circuits = coil.waterCircuits;
  // Properties at the mean temperature, found in a few rounds.
  let meanC = water.inletC + 8;
  const stateAt = (t: number) =>
    water.flow !== null
      ? flowThrough(passage, water.flow / circuits, t)
      : flowAtPressure(passage, water.differential, t);
  let state = stateAt(meanC);
  for (let i = 0; i < 4; i++) {
    const next = temperatureRise(duty, state.flow * circuits, water.inletC).meanC;
    if (!Number.isFinite(next)) break;
    meanC = Math.min(100, next);
    state = stateAt(meanC);
  }
  const flow = state.flow * circuits;
  const { rise } = temperatureRise(duty, flow, water.inletC);
  if (!Number.isFinite(rise)) return null;
  const known = water.flow !== null;
  // Δp is given: v goes with 1/√f, so half the correlations' spread. Flow is given: the spread is in Δp.
  const frictionShare = state.friction.band;
  const flowShare = known ? 0.02 : frictionShare / 2;
  const friction: Effect = {
    name: 'friction in the coiled tube',
    variation: { value: frictionShare, unit: '1' },
    change: 0,
  };
  const bore: Effect = {
    name: 'wall of the tube',
    variation: { value: 0.1 * coil.tube.wall, unit: 'm' },
    change: 0,
  };
  const boreShare = known ? 0 : (0.2 * coil.tube.wall * 2.5) / passage.hydraulicDiameter;
  const flowEffects = (scale: number): Effect[] => [
    { ...friction, change: scale * flowShare },
    { ...bore, change: scale * boreShare },
  ];
  const riseEffects: Effect[] = [
    ...dutyEffects.map((e) => ({ ...e, change: (e.change / duty) * rise })),
    ...flowEffects(rise),
  ];
  const outlet = water.inletC + rise;
  const concentration = Math.max(
    1,
    ...input.turnLossShare.map((share) => share * input.turnLossShare.length),
  );
  const wall = wallTemperature(passage, state, duty / circuits, outlet, concentration);
  const method = state.friction.method;
  const of = (value: number, unit: Figure['unit'], how: string, effects: Effect[]) =>
    figure(value, unit, how, effects);
  const limitRise = Math.max(1, Math.min(mostRise, water.outletLimitC - water.inletC));
  const differential = known ? state.pressureDrop : water.differential;
  return {
    duty: figure(
      duty,
      'W',
      'copper and leads, plus radiation and convection taken up from the part',
      dutyEffects,
      {
        least: 0,
        assumptions: ['Continuous running at deliverable power.'],
      },
    ),
    flow: figure(
      flow,
      'm3/s',
      known ? 'entered' : `${method}, at the differential pressure`,
      flowEffects(flow),
      {
        least: 0,
        assumptions: ['Tube friction only: hoses, fittings and tight bends are not included.'],
      },
    ),
    velocity: of(state.velocity, 'm/s', 'flow over bore area', flowEffects(state.velocity)),
    reynolds: of(state.reynolds, '1', 'ρ v d/µ at the mean water temperature', flowEffects(state.reynolds)),
    temperatureRise: of(rise, 'K', 'duty over ρ·cp·flow', riseEffects),
    outletTemperature: of(outlet, 'C', 'inlet plus rise', riseEffects),
    wallTemperature: of(
      wall,
      'C',
      state.friction.regime === 'laminar'
        ? 'Schmidt, coiled tube, laminar'
        : 'Gnielinski with the coil’s friction',
      [
        ...riseEffects,
        { name: 'film coefficient', variation: { value: 0.25, unit: '1' }, change: 0.25 * (wall - outlet) },
      ],
    ),
    pressureDrop: of(
      state.pressureDrop,
      'Pa',
      method,
      known ? [{ ...friction, change: state.pressureDrop * frictionShare }] : [],
    ),
    circuitsAdvised: circuitsAdvised(
      (n) => passageOf(coil, path, n) ?? passage,
      duty,
      differential,
      water.inletC,
      limitRise,
      Math.max(coil.waterCircuits, Math.min(12, Math.ceil(path.turns))),
    ),
  };
}
