/** The water's way through a coil: pressure drop, flow, temperatures. Friction only, no fittings or hoses. */
import { coiledFriction, copperRoughness, type Friction } from './friction.ts';
import { coiledNusselt } from './heat-transfer.ts';
import { water } from './water.ts';

/** One of the parallel circuits. */
export interface Passage {
  /** m */
  length: number;
  /** Hydraulic diameter of the bore, 4·area/perimeter, m. */
  hydraulicDiameter: number;
  /** Bore area, m². */
  area: number;
  /** Wetted perimeter, m. */
  perimeter: number;
  /** Mean diameter of the winding, m; null or 0 = straight. */
  coilDiameter: number | null;
  roughness?: number;
}

export interface PassageFlow {
  /** m³/s in this passage. */
  flow: number;
  velocity: number;
  reynolds: number;
  friction: Friction;
  /** Pa */
  pressureDrop: number;
}

const tubeOverCoil = (passage: Passage) =>
  passage.coilDiameter && passage.coilDiameter > 0 ? passage.hydraulicDiameter / passage.coilDiameter : 0;

/** Darcy–Weisbach drop of a given flow, with properties at `temperatureC`. */
export function flowThrough(passage: Passage, flow: number, temperatureC: number): PassageFlow {
  const w = water(temperatureC);
  const velocity = flow / passage.area;
  const reynolds = Math.max(1e-6, (w.density * velocity * passage.hydraulicDiameter) / w.viscosity);
  const roughness = (passage.roughness ?? copperRoughness) / passage.hydraulicDiameter;
  const friction = coiledFriction(reynolds, tubeOverCoil(passage), roughness);
  const pressureDrop =
    (((friction.factor * passage.length) / passage.hydraulicDiameter) * w.density * velocity ** 2) / 2;
  return { flow, velocity, reynolds, friction, pressureDrop };
}

/**
 * Flow that a differential pressure drives through the passage, m³/s, to 1e-6. Where the friction jumps at the
 * laminar–turbulent change the flow at the jump is given.
 */
export function flowAtPressure(passage: Passage, pressure: number, temperatureC: number): PassageFlow {
  if (!(pressure > 0)) return flowThrough(passage, 0, temperatureC);
  let low = 0;
  let high = passage.area * 30;
  for (let i = 0; i < 80; i++) {
    const middle = (low + high) / 2;
    if (flowThrough(passage, middle, temperatureC).pressureDrop > pressure) high = middle;
    else low = middle;
    if (high - low < 1e-7 * high) break;
  }
  return flowThrough(passage, (low + high) / 2, temperatureC);
}

/** Mean temperature of the water that carries `heat` watts away with `flow`, and its rise. */
export function temperatureRise(heat: number, flow: number, inletC: number): { rise: number; meanC: number } {
  let rise = 0;
  // Properties at the mean temperature: two rounds are within 0.01 K.
  for (let i = 0; i < 4; i++) {
    const w = water(inletC + rise / 2);
    rise = flow > 0 ? heat / (w.density * w.specificHeat * flow) : Number.POSITIVE_INFINITY;
    if (!Number.isFinite(rise)) break;
  }
  return { rise, meanC: inletC + rise / 2 };
}

/**
 * Hottest wall of the bore, °C: water at the outlet plus heat flux over the film coefficient.
 *
 * @param heat W taken up by this passage
 * @param concentration heat of the hottest turn over the mean turn
 */
export function wallTemperature(
  passage: Passage,
  state: PassageFlow,
  heat: number,
  outletC: number,
  concentration: number,
): number {
  const w = water(Math.min(100, outletC));
  const nusselt = coiledNusselt(
    {
      reynolds: state.reynolds,
      prandtl: w.prandtl,
      friction: state.friction.factor,
      regime: state.friction.regime,
    },
    tubeOverCoil(passage),
  );
  const film = (nusselt * w.conductivity) / passage.hydraulicDiameter;
  return outletC + (heat * concentration) / (passage.perimeter * passage.length * film);
}

/**
 * Number of parallel circuits with which the rise stays below `limitRise`, at most `most`; the same when more
 * circuits do not help.
 */
export function circuitsAdvised(
  passageOf: (circuits: number) => Passage,
  heat: number,
  pressure: number,
  inletC: number,
  limitRise: number,
  most: number,
): number {
  for (let circuits = 1; circuits <= most; circuits++) {
    const flow = flowAtPressure(passageOf(circuits), pressure, inletC + limitRise / 2).flow * circuits;
    if (temperatureRise(heat, flow, inletC).rise <= limitRise) return circuits;
  }
  return most;
}
