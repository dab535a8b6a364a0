/** Copper and water: heat taken up, flow, temperatures. */
import { boreOf } from '../cooling/bore.ts';
import {
  circuitsAdvised,
  flowAtPressure,
  flowThrough,
  temperatureRise,
  wallTemperature,
  type Passage,
  type PassageFlow,
} from '../cooling/passage.ts';
import type { CopperPath } from '../shop/path.ts';
import type { Assumption } from './assume.ts';
import { figure, type Effect } from './figure.ts';
import type { Coil, CoolingSupply, WaterFigures } from './types.ts';

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

interface SolvedWater {
  state: PassageFlow;
  flow: number;
  rise: number;
}

/** Flow and rise with properties at the mean temperature, found in a few rounds; null where no water flows. */
function solveWater(input: WaterInput, passage: Passage, duty: number): SolvedWater | null {
  const { water } = input;
  const circuits = input.coil.waterCircuits;
  const stateAt = (t: number) =>
    water.flow !== null
      ? flowThrough(passage, water.flow / circuits, t)
      : flowAtPressure(passage, water.differential, t);
  let state = stateAt(water.inletC + 8);
  for (let i = 0; i < 4; i++) {
    const next = temperatureRise(duty, state.flow * circuits, water.inletC).meanC;
    if (!Number.isFinite(next)) break;
    state = stateAt(Math.min(100, next));
  }
  const flow = state.flow * circuits;
  const { rise } = temperatureRise(duty, flow, water.inletC);
  return Number.isFinite(rise) ? { state, flow, rise } : null;
}

/** Effects of duty and flow, as shares. */
function waterEffects(input: WaterInput, passage: Passage, state: PassageFlow, duty: number) {
  const { copperHeat, partHeat, coil, water } = input;
  const watts = (name: string, band: number): Effect => ({
    name,
    variation: { value: band, unit: 'W' },
    change: band,
  });
  const dutyEffects = [
    watts('loss in copper and leads', copperHeat.band),
    watts('heat from the part', partHeat.band),
  ];
  // Δp is given: v goes with 1/√f, so half the correlations' spread. Flow is given: the spread is in Δp.
  const known = water.flow !== null;
  const friction = state.friction.band;
  const shares: Effect[] = [
    {
      name: 'friction in the coiled tube',
      variation: { value: friction, unit: '1' },
      change: known ? 0.02 : friction / 2,
    },
    {
      name: 'wall of the tube',
      variation: { value: 0.1 * coil.tube.wall, unit: 'm' },
      change: known ? 0 : (0.5 * coil.tube.wall) / passage.hydraulicDiameter,
    },
  ];
  const scaled = (list: readonly Effect[], by: number) =>
    list.map((one) => ({ ...one, change: one.change * by }));
  return {
    duty: dutyEffects,
    flow: (scale: number) => scaled(shares, scale),
    rise: (rise: number) => [...scaled(dutyEffects, rise / duty), ...scaled(shares, rise)],
    drop: (drop: number) => (known ? [{ ...(shares[0] as Effect), change: drop * friction }] : []),
  };
}

/** @returns null for a solid conductor, and where no water flows */
export function waterFigures(input: WaterInput): WaterFigures | null {
  const { coil, path, water } = input;
  const passage = passageOf(coil, path, coil.waterCircuits);
  if (!passage) return null;
  const duty = input.copperHeat.value + input.partHeat.value;
  const solved = solveWater(input, passage, duty);
  if (!solved) return null;
  const { state, flow, rise } = solved;
  const effects = waterEffects(input, passage, state, duty);
  const outlet = water.inletC + rise;
  const concentration = Math.max(
    1,
    ...input.turnLossShare.map((share) => share * input.turnLossShare.length),
  );
  const wall = wallTemperature(passage, state, duty / coil.waterCircuits, outlet, concentration);
  const { method, regime } = state.friction;
  const known = water.flow !== null;
  return {
    duty: figure(
      duty,
      'W',
      'copper and leads, plus radiation and convection taken up from the part',
      effects.duty,
      {
        least: 0,
        assumptions: ['Continuous running at deliverable power.'],
      },
    ),
    flow: figure(
      flow,
      'm3/s',
      known ? 'entered' : `${method}, at the differential pressure`,
      effects.flow(flow),
      {
        least: 0,
        assumptions: ['Tube friction only: hoses, fittings and tight bends are not included.'],
      },
    ),
    velocity: figure(state.velocity, 'm/s', 'flow over bore area', effects.flow(state.velocity)),
    reynolds: figure(
      state.reynolds,
      '1',
      'ρ v d/µ at the mean water temperature',
      effects.flow(state.reynolds),
    ),
    temperatureRise: figure(rise, 'K', 'duty over ρ·cp·flow', effects.rise(rise)),
    outletTemperature: figure(outlet, 'C', 'inlet plus rise', effects.rise(rise)),
    wallTemperature: figure(
      wall,
      'C',
      regime === 'laminar' ? 'Schmidt, coiled tube, laminar' : 'Gnielinski with the coil’s friction',
      [
        ...effects.rise(rise),
        { name: 'film coefficient', variation: { value: 0.25, unit: '1' }, change: 0.25 * (wall - outlet) },
      ],
    ),
    pressureDrop: figure(state.pressureDrop, 'Pa', method, effects.drop(state.pressureDrop)),
    circuitsAdvised: circuitsAdvised(
      (n) => passageOf(coil, path, n) ?? passage,
      duty,
      known ? state.pressureDrop : water.differential,
      water.inletC,
      Math.max(1, Math.min(mostRise, water.outletLimitC - water.inletC)),
      Math.max(coil.waterCircuits, Math.min(12, Math.ceil(path.turns))),
    ),
  };
}
