import { InductionInputError, requireWithin } from '../input-error.ts';
import { isAxisymmetric } from '../coil/rings.ts';
import { facingSide, type FacingSide } from '../field/part-model.ts';
import type { Material } from '../materials/types.ts';
import { CoilAndPart, type ElectricState } from './coil-and-part.ts';
import {
  conductionState,
  conductionStep,
  surfaceTemperature,
  type ConductionState,
  type SurfaceTransfer,
} from './conduction.ts';
import type { HeatingEnd, HeatingInput, HeatingPoint, HeatingResult, HeatingWatch } from './types.ts';

/** Temperature change aimed at per step, largest accepted, K. */
const STEP_AIM = 10;
const STEP_MOST = 30;
/** However slow the heating, the curve has this many points. */
const LEAST_STEPS = 80;
/** Drift of ln ρ or ln μ that calls for a new field solution. */
const DRIFT = 0.04;
const MOST_POINTS = 400;
const MOST_STEPS = 20_000;
const MOST_UPDATES = 1500;

function checkInput(input: HeatingInput): void {
  if (!isAxisymmetric(input.coil.winding)) {
    throw new InductionInputError(
      'outside-method',
      'coil.winding.shape',
      'This coil shape cannot be heated with its part in the calculation.',
    );
  }
  requireWithin(input.time, 1e-3, 1e5, 'time', 'Heating time');
  requireWithin(input.startTemperatureC, -60, 2500, 'startTemperatureC', 'Start temperature');
  requireWithin(input.ambientTemperatureC, -60, 2500, 'ambientTemperatureC', 'Ambient temperature');
  requireWithin(input.convection, 0, 1e5, 'convection', 'Heat transfer coefficient');
  requireWithin(input.fixedInductance, 0, 1, 'fixedInductance', 'Fixed inductance');
  requireWithin(input.fixedResistance, 0, 1e3, 'fixedResistance', 'Fixed resistance');
  requireWithin(
    input.materialHotTemperatureC,
    -60,
    3400,
    'materialHotTemperatureC',
    'Temperature of the hot resistivity',
  );
  if (input.emissivity !== null) requireWithin(input.emissivity, 0, 1, 'emissivity', 'Emissivity');
  if (input.targetTemperatureC !== null)
    requireWithin(input.targetTemperatureC, -60, 3400, 'targetTemperatureC', 'Target temperature');
  const { drive, frequency } = input;
  const size =
    drive.kind === 'current' ? drive.current : drive.kind === 'power' ? drive.power : drive.voltage;
  requireWithin(
    size,
    1e-3,
    1e8,
    `drive.${drive.kind}`,
    drive.kind === 'current' ? 'Current' : drive.kind === 'power' ? 'Power' : 'Voltage',
  );
  if (frequency.kind === 'fixed')
    requireWithin(frequency.frequency, 1, 1e8, 'frequency.frequency', 'Frequency');
  else requireWithin(frequency.capacitance, 1e-12, 1, 'frequency.capacitance', 'Capacitance');
}

/** Each quadratic element becomes two cells by two. */
function cellEdges(edges: Float64Array): Float64Array {
  const out = new Float64Array(2 * edges.length - 1);
  for (let k = 0; k < edges.length; k++) {
    out[2 * k] = edges[k] as number;
    if (k + 1 < edges.length) out[2 * k + 1] = 0.5 * ((edges[k] as number) + (edges[k + 1] as number));
  }
  return out;
}

function thermalState(run: CoilAndPart, input: HeatingInput, side: FacingSide): ConductionState {
  const { grid } = run.model.elements;
  const { part } = run.load;
  const emissivity = input.emissivity ?? run.material.emissivity;
  const open: SurfaceTransfer = { convection: input.convection, emissivity };
  // A bore that does not look at the coil sees mostly itself; what leaves through its ends is counted.
  const escape =
    side === 'bore' ? 1 : 1 / (1 + (part.high - part.low) / Math.max(1e-9, 2 * part.innerRadius));
  const bore: SurfaceTransfer = { convection: input.convection * escape, emissivity: emissivity * escape };
  return conductionState(
    {
      r: cellEdges(grid.r),
      z: cellEdges(grid.z),
      sides: {
        inner: part.innerRadius > 0 ? bore : null,
        outer: open,
        low: grid.half ? null : open,
        high: open,
      },
    },
    input.startTemperatureC,
  );
}

/** Where surface and core are read: cells, and the half cell to the surface. */
interface Places {
  surface: number;
  core: number;
  half: number;
  transfer: SurfaceTransfer;
}

function placesOf(run: CoilAndPart, state: ConductionState, side: FacingSide): Places {
  const { grid, nr, nz } = state;
  const nearest = (edges: Float64Array, x: number) => {
    let best = 0;
    for (let k = 0; k + 1 < edges.length; k++) if ((edges[k] as number) <= x) best = k;
    return Math.min(best, edges.length - 2);
  };
  const width = (edges: Float64Array, k: number) => (edges[k + 1] as number) - (edges[k] as number);
  const none: SurfaceTransfer = { convection: 0, emissivity: 0 };
  if (side === 'outer' || side === 'bore') {
    const row = nearest(grid.z, 0) * nr;
    const at = side === 'outer' ? nr - 1 : 0;
    const transfer = (side === 'outer' ? grid.sides.outer : grid.sides.inner) ?? none;
    return { surface: row + at, core: row + (nr - 1 - at), half: width(grid.r, at) / 2, transfer };
  }
  const rings = run.prepared.rings.rings;
  const column = nearest(grid.r, rings.reduce((sum, ring) => sum + ring.radius, 0) / rings.length);
  const at = side === 'low' ? 0 : nz - 1;
  const transfer = (side === 'low' ? grid.sides.low : grid.sides.high) ?? none;
  return {
    surface: at * nr + column,
    core: (nz - 1 - at) * nr + column,
    half: width(grid.z, at) / 2,
    transfer,
  };
}

/** Volume-weighted mean temperature of each element's four cells. */
function elementTemperatures(run: CoilAndPart, state: ConductionState): Float64Array {
  const { nr, nz } = run.model.elements;
  const out = new Float64Array(nr * nz);
  const volume = new Float64Array(nr * nz);
  for (let c = 0; c < state.temperature.length; c++) {
    const at = (((c / state.nr) | 0) >> 1) * nr + ((c % state.nr) >> 1);
    const v = state.volume[c] as number;
    out[at] = (out[at] as number) + v * (state.temperature[c] as number);
    volume[at] = (volume[at] as number) + v;
  }
  return out.map((sum, k) => sum / (volume[k] as number));
}

/** Temperature with a given enthalpy, by bisection. */
function temperatureOf(material: Material, enthalpy: number, low: number, high: number): number {
  let a = low;
  let b = high;
  for (let k = 0; k < 60; k++) {
    const mid = 0.5 * (a + b);
    if (material.enthalpy(mid) < enthalpy) a = mid;
    else b = mid;
  }
  return 0.5 * (a + b);
}

/** Keeps at most 400 points: every other one goes when the list is full, never the first or last. */
function keep(curve: HeatingPoint[], point: HeatingPoint, stride: { every: number; count: number }): void {
  stride.count++;
  if (stride.count % stride.every !== 0) return;
  curve.push(point);
  if (curve.length < MOST_POINTS) return;
  const thinned = curve.filter((_, k) => k % 2 === 0);
  curve.splice(0, curve.length, ...thinned);
  stride.every *= 2;
}

/**
 * Heating of a part in its coil: the field solution with the part's temperature and saturation, and conduction
 * with surface losses, coupled. The fields are solved anew when the power-weighted drift of resistivity
 * or permeability exceeds 4 %; time steps aim at 10 K.
 *
 * Drives: constant coil current, constant power, constant tank voltage; frequency fixed or following the
 * tank. Range: round coils about one axis, a part standing still in the coil; above the solidus the run
 * ends. Temperatures agree with finer grids and steps within about 1 %; materials and surface losses
 * are less certain than that.
 *
 * @throws InductionInputError for input that cannot be computed
 * Source: enthalpy form of finite volumes after Patankar (1980); fields as `solveImpedance`.
 */
export function runHeating(input: HeatingInput, watch: HeatingWatch = {}): HeatingResult {
  checkInput(input);
  const run = new CoilAndPart(input);
  const side = facingSide(run.prepared.geometry, run.load);
  const state = thermalState(run, input, side);
  const places = placesOf(run, state, side);
  const { material } = run;
  const times = run.model.elements.grid.half ? 2 : 1;
  const enthalpyOfPart = () => {
    let sum = 0;
    let volume = 0;
    for (let c = 0; c < state.temperature.length; c++) {
      const v = state.volume[c] as number;
      sum += v * material.enthalpy(state.temperature[c] as number);
      volume += v;
    }
    return { mean: sum / volume, total: sum * material.density * times };
  };
  const begin = enthalpyOfPart().total;
  let electric: ElectricState = run.solve(elementTemperatures(run, state));
  const pointAt = (time: number): HeatingPoint => {
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    for (const t of state.temperature) {
      low = Math.min(low, t);
      high = Math.max(high, t);
    }
    const cell = state.temperature[places.surface] as number;
    return {
      time,
      surfaceC: surfaceTemperature(
        cell,
        places.half,
        places.transfer,
        material.conductivity(cell),
        input.ambientTemperatureC,
      ),
      meanC: temperatureOf(material, enthalpyOfPart().mean, low - 1, high + 1),
      coreC: state.temperature[places.core] as number,
      hottestC: high,
      partPower: electric.partPower,
      totalPower: electric.totalPower,
      surfaceLoss: state.loss * times,
      current: electric.current,
      voltage: electric.voltage,
      inductance: electric.inductance,
      resistance: electric.resistance,
      frequency: electric.frequency,
    };
  };
  const curve: HeatingPoint[] = [];
  const stride = { every: 1, count: 0 };
  let point = pointAt(0);
  keep(curve, point, stride);
  const curie = material.magnetisation?.curieC ?? null;
  const real = curie !== null && curie < 5000 ? curie : null;
  const passed = { surface: null as number | null, core: null as number | null };
  const balance = { input: 0, stored: 0, lost: 0, closure: 0, coilLoss: 0 };
  let time = 0;
  let steps = 0;
  let dt = firstStep(electric.source, state, material, input.time);
  let end: HeatingEnd = 'time';
  while (time < input.time * (1 - 1e-9)) {
    if (watch.shouldStop?.() === true) {
      end = 'stopped';
      break;
    }
    if (steps >= MOST_STEPS || run.updates >= MOST_UPDATES) {
      end = 'limit';
      break;
    }
    const elements = elementTemperatures(run, state);
    if (run.drift(elements) > DRIFT) electric = run.solve(elements);
    let step = Math.min(dt, input.time / LEAST_STEPS, input.time - time);
    let result = conductionStep(state, material, electric.source, step, input.ambientTemperatureC);
    let largest =
      result === null ? Number.POSITIVE_INFINITY : largestChange(state.temperature, result.temperature);
    for (let retry = 0; (result === null || largest > STEP_MOST) && retry < 40; retry++) {
      step *= 0.4;
      result = conductionStep(state, material, electric.source, step, input.ambientTemperatureC);
      largest =
        result === null ? Number.POSITIVE_INFINITY : largestChange(state.temperature, result.temperature);
    }
    if (result === null) {
      throw new InductionInputError(
        'not-converged',
        'drive',
        'The temperature step did not settle: power is out of proportion to the part.',
      );
    }
    const before = point;
    state.temperature.set(result.temperature);
    state.loss = result.loss;
    time += step;
    steps++;
    balance.input += electric.partPower * step;
    balance.coilLoss += (electric.totalPower - electric.partPower) * step;
    balance.lost += result.loss * times * step;
    point = pointAt(time);
    if (real !== null) {
      passed.surface ??= crossing(before.surfaceC, point.surfaceC, before.time, time, real);
      passed.core ??= crossing(before.coreC, point.coreC, before.time, time, real);
    }
    keep(curve, point, stride);
    watch.onProgress?.(time / input.time, point);
    dt = step * Math.min(1.6, Math.max(0.4, STEP_AIM / Math.max(largest, 1e-6)));
    if (material.solidusC !== null && point.hottestC >= material.solidusC) {
      end = 'melting';
      break;
    }
    if (input.targetTemperatureC !== null && point.surfaceC >= input.targetTemperatureC) {
      end = 'target';
      break;
    }
  }
  if (curve[curve.length - 1] !== point) curve.push(point);
  if (curve.length > MOST_POINTS) curve.splice(curve.length - 2, 1);
  balance.stored = enthalpyOfPart().total - begin;
  balance.closure = balance.input > 0 ? (balance.stored + balance.lost) / balance.input - 1 : 0;
  return {
    curve,
    curieSurfaceTime: passed.surface,
    curieCoreTime: passed.core,
    curieTemperatureC: real,
    balance,
    end,
    time,
    fieldSolutions: run.solutions,
    fieldUpdates: run.updates,
    steps,
    method: 'field solution coupled with conduction (implicit, enthalpy form)',
    assumptions: assumptionsOf(input, material, side),
  };
}

function firstStep(source: Float64Array, state: ConductionState, material: Material, total: number): number {
  let rate = 0;
  for (let c = 0; c < source.length; c++) {
    const t = state.temperature[c] as number;
    const heat = material.density * (state.volume[c] as number) * material.specificHeat(t);
    rate = Math.max(rate, (source[c] as number) / heat);
  }
  return Math.min(total / 50, rate > 0 ? 5 / rate : total / 50);
}

function largestChange(a: Float64Array, b: Float64Array): number {
  let largest = 0;
  for (let c = 0; c < a.length; c++)
    largest = Math.max(largest, Math.abs((a[c] as number) - (b[c] as number)));
  return largest;
}

function crossing(t0: number, t1: number, from: number, to: number, level: number): number | null {
  if (t0 >= level || t1 < level) return null;
  return from + ((to - from) * (level - t0)) / Math.max(1e-9, t1 - t0);
}

function assumptionsOf(input: HeatingInput, material: Material, side: FacingSide): string[] {
  const out = [
    'The part stands still in the coil and is bare: no quench, no contact with a fixture.',
    `Surface losses: ${input.convection} W/(m²·K) and emissivity ${input.emissivity ?? material.emissivity}.`,
  ];
  if (side !== 'bore' && input.part.insideDiameter > 0) {
    out.push('From the bore only what leaves through its ends is lost (estimate).');
  }
  if (material.magnetisation !== null) {
    out.push('Steel: first-harmonic permeability from a B-H law, no hysteresis heat.');
  }
  if (Object.values(material.records).some((r) => r.standing === 'memory')) {
    out.push('Some material values are from memory: see the material.');
  }
  return out;
}
