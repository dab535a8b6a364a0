/** Energy balance of the heating: what the part takes up, what its surface loses, how long the power takes. */
import { KELVIN_OFFSET, STEFAN_BOLTZMANN } from '../constants/physical.ts';
import type { Material } from '../materials/types.ts';
import { figure, figureWithin, type Effect } from './figure.ts';
import type { Figure, HeatingFigures, Process, Workpiece } from './types.ts';

/** Still air around a horizontal part, W/(m²·K) (common practice). */
const convection = 10;
const ambientC = 25;

/** Loss of a hot surface by radiation and natural convection, W/m². Stefan–Boltzmann; convection 10 W/(m²·K). */
export function surfaceLossDensity(
  temperatureC: number,
  emissivity: number,
  atmosphere: Process['atmosphere'],
): number {
  const t = temperatureC + KELVIN_OFFSET;
  const a = ambientC + KELVIN_OFFSET;
  const moved = atmosphere === 'vacuum' ? 0 : convection * (temperatureC - ambientC);
  return Math.max(0, emissivity * STEFAN_BOLTZMANN * (t ** 4 - a ** 4) + moved);
}

/** Length of the part that gets hot, m. */
export const heatedLength = (part: Workpiece): number =>
  Math.min(part.heatedLength ?? part.length, part.length);

/** Outside area that gets hot, m²; of a tube in air the bore radiates into itself and is left out. */
export const heatedArea = (part: Workpiece): number =>
  part.form === 'disc'
    ? (Math.PI * part.outsideDiameter ** 2) / 4
    : Math.PI * part.outsideDiameter * heatedLength(part);

/**
 * Energy to reach the target, J.
 *
 * Through heating: mass × enthalpy. To a depth: that layer at target temperature, and beyond it a tail that falls as
 * exp(−(x − depth)/√(α·t)) into the colder core, integrated over the section with the enthalpy of each layer.
 *
 * @param time heating time for the tail, s
 */
export function energyToTarget(
  part: Workpiece,
  process: Process,
  material: Material,
  time: number,
): { energy: number; massHeated: number } {
  const start = process.startTemperatureC;
  const target = process.targetTemperatureC;
  const length = heatedLength(part);
  const outer = part.outsideDiameter / 2;
  const inner = part.insideDiameter / 2;
  const rise = (t: number) => material.enthalpy(t) - material.enthalpy(start);
  const flat = part.form === 'disc';
  const area = flat ? Math.PI * (outer ** 2 - inner ** 2) : 0;
  const mass = material.density * Math.PI * (outer ** 2 - inner ** 2) * (flat ? part.length : length);
  if (part.depthWanted === null) return { energy: mass * rise(target), massHeated: mass };
  const mean = (start + target) / 2;
  const diffusivity = material.conductivity(mean) / (material.density * material.specificHeat(mean));
  const tail = Math.max(1e-6, Math.sqrt(diffusivity * Math.max(time, 1e-3)));
  const thickness = flat ? part.length : outer - inner;
  const steps = 400;
  let energy = 0;
  let heated = 0;
  for (let i = 0; i < steps; i++) {
    const x = ((i + 0.5) / steps) * thickness;
    const volume = flat
      ? (area * thickness) / steps
      : (2 * Math.PI * (outer - x) * length * thickness) / steps;
    const t =
      x <= part.depthWanted ? target : start + (target - start) * Math.exp(-(x - part.depthWanted) / tail);
    energy += material.density * volume * rise(t);
    if (x <= part.depthWanted) heated += material.density * volume;
  }
  return { energy, massHeated: heated };
}

/** Heating time asked for: entered, or from parts per hour (then with no time for handling). */
export function timeAsked(process: Process): number | null {
  if (process.time !== null) return process.time;
  return process.partsPerHour !== null ? 3600 / process.partsPerHour : null;
}

export interface PowerIntoPart {
  cold: Figure;
  hot: Figure;
}

/** Share of the energy that goes in while the part is still magnetic (cold figures), by enthalpy. */
export function coldShare(process: Process, material: Material): number {
  const curie = material.magnetisation?.curieC;
  if (curie === undefined) return 0.5;
  const h = (t: number) => material.enthalpy(t);
  const whole = h(process.targetTemperatureC) - h(process.startTemperatureC);
  if (!(whole > 0)) return 0.5;
  return Math.min(
    1,
    Math.max(0, (h(Math.min(curie, process.targetTemperatureC)) - h(process.startTemperatureC)) / whole),
  );
}

/** Mean power into the part over the cycle: energy over the sum of the times of the cold and hot shares, W. */
export function meanPartPower(power: { cold: number; hot: number }, share: number): number {
  return 1 / (share / power.cold + (1 - share) / power.hot);
}

export function heatingFigures(
  part: Workpiece,
  process: Process,
  material: Material,
  power: PowerIntoPart | null,
): HeatingFigures {
  const asked = timeAsked(process);
  const surface = part.depthWanted !== null;
  const emissivity = material.emissivity;
  const loss =
    surfaceLossDensity(process.targetTemperatureC, emissivity, process.atmosphere) * heatedArea(part);
  const share = coldShare(process, material);
  const mean = power ? meanPartPower({ cold: power.cold.value, hot: power.hot.value }, share) : null;
  // The surface is at target temperature only at the end: half its loss stands for the cycle.
  const timeFor = (energy: number, watts: number) => energy / Math.max(1e-9, watts - loss / 2);
  let time = asked ?? 5;
  // Without a time asked, tail and time belong together: a few rounds settle both.
  if (asked === null && mean !== null)
    for (let i = 0; i < 20; i++)
      time = Math.min(1e5, timeFor(energyToTarget(part, process, material, time).energy, mean));
  const { energy, massHeated } = energyToTarget(part, process, material, time);
  const heatScatter = material.records.specificHeat.uncertainty;
  const energyEffects: Effect[] = [
    { name: 'specific heat', variation: { value: heatScatter, unit: '1' }, change: energy * heatScatter },
    ...(surface
      ? [
          {
            name: 'heat that runs into the core',
            variation: { value: 0.2, unit: '1' as const },
            change: energy * 0.2,
          },
        ]
      : []),
  ];
  const energyFigure = figure(
    energy,
    'J',
    surface ? 'layer at target temperature with a conduction tail' : 'mass × enthalpy',
    energyEffects,
    {
      least: 0,
      assumptions: surface ? ['Energy balance, not a transient: the tail into the core is an estimate.'] : [],
    },
  );
  const energyShare = (energyFigure.high - energyFigure.low) / 2 / energy;
  const lossFigure = figureWithin(loss, 0.3, 'W', 'radiation and convection at target temperature', [
    `Emissivity ${emissivity}, convection 10 W/(m²·K).`,
  ]);
  return {
    energy: energyFigure,
    meanPowerNeeded: asked === null ? null : needed(energy, energyShare, loss, asked),
    timeAtDeliverablePower:
      mean === null || power === null || mean <= loss / 2
        ? null
        : timeFigure(energy, energyShare, loss, mean, power),
    surfaceLoss: lossFigure,
    massHeated,
  };
}

function needed(energy: number, energyShare: number, loss: number, time: number): Figure {
  return figure(
    energy / time + loss / 2,
    'W',
    'energy over time, plus half the surface loss at target temperature',
    [
      { name: 'energy', variation: { value: energyShare, unit: '1' }, change: (energy / time) * energyShare },
      { name: 'surface loss', variation: { value: 0.3, unit: '1' }, change: 0.15 * loss },
    ],
    { least: 0 },
  );
}

function timeFigure(
  energy: number,
  energyShare: number,
  loss: number,
  mean: number,
  power: PowerIntoPart,
): Figure {
  const time = energy / (mean - loss / 2);
  const powerShare = Math.max(
    (power.cold.high - power.cold.low) / 2 / power.cold.value,
    (power.hot.high - power.hot.low) / 2 / power.hot.value,
  );
  return figure(
    time,
    's',
    'energy over the mean power into the part less half the surface loss',
    [
      { name: 'energy', variation: { value: energyShare, unit: '1' }, change: time * energyShare },
      {
        name: 'power into the part',
        variation: { value: powerShare, unit: '1' },
        change: time * powerShare * (mean / (mean - loss / 2)),
      },
    ],
    { least: 0, assumptions: ['Constant deliverable power; the heating run gives temperatures over time.'] },
  );
}
