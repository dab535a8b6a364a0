import { InductionInputError, requireWithin } from '../input-error.ts';
import { isAxisymmetric } from '../coil/rings.ts';
import { facingSide, type FacingSide } from '../field/part-model.ts';
import type { Material } from '../materials/types.ts';
import { CoilAndPart, type ElectricState } from './coil-and-part.ts';
import { conductionStep, type ConductionState } from './conduction.ts';
import { HeatingRecorder } from './recorder.ts';
import { elementTemperatures, placesOf, thermalState } from './thermal-grid.ts';
import type { HeatingEnd, HeatingInput, HeatingResult, HeatingWatch } from './types.ts';

/** Temperature change aimed at per step, largest accepted, K. */
const STEP_AIM = 10;
const STEP_MOST = 30;
/** However slow the heating, the curve has this many points. */
const LEAST_STEPS = 80;
/** Drift of ln ρ or ln μ that calls for a new field solution. */
const DRIFT = 0.04;
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
  const { material } = run;
  const times = run.model.elements.grid.half ? 2 : 1;
  const recorder = new HeatingRecorder(
    state,
    placesOf(run, state, side),
    material,
    input.ambientTemperatureC,
    times,
  );
  let electric: ElectricState = run.solve(elementTemperatures(run, state));
  recorder.record(0, 0, electric);
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
    const wanted = Math.min(dt, input.time / LEAST_STEPS, input.time - time);
    const taken = takeStep(state, material, electric.source, wanted, input.ambientTemperatureC);
    time += taken.step;
    steps++;
    const point = recorder.record(time, taken.step, electric);
    watch.onProgress?.(time / input.time, point);
    dt = taken.step * Math.min(1.6, Math.max(0.4, STEP_AIM / Math.max(taken.largest, 1e-6)));
    if (material.solidusC !== null && point.hottestC >= material.solidusC) {
      end = 'melting';
      break;
    }
    if (input.targetTemperatureC !== null && point.surfaceC >= input.targetTemperatureC) {
      end = 'target';
      break;
    }
  }
  recorder.finish();
  return {
    curve: recorder.curve,
    curieSurfaceTime: recorder.curieSurface,
    curieCoreTime: recorder.curieCore,
    curieTemperatureC: recorder.curieC,
    balance: recorder.balance,
    end,
    time,
    fieldSolutions: run.solutions,
    fieldUpdates: run.updates,
    steps,
    method: 'field solution coupled with conduction (implicit, enthalpy form)',
    assumptions: assumptionsOf(input, material, side),
  };
}

/** One accepted step: shortened until it settles and no cell changes by more than 30 K. */
function takeStep(
  state: ConductionState,
  material: Material,
  source: Float64Array,
  wanted: number,
  ambientC: number,
): { step: number; largest: number } {
  let step = wanted;
  for (let attempt = 0; attempt < 40; attempt++) {
    const result = conductionStep(state, material, source, step, ambientC);
    const largest =
      result === null ? Number.POSITIVE_INFINITY : largestChange(state.temperature, result.temperature);
    if (result !== null && largest <= STEP_MOST) {
      state.temperature.set(result.temperature);
      state.loss = result.loss;
      return { step, largest };
    }
    step *= 0.4;
  }
  throw new InductionInputError(
    'not-converged',
    'drive',
    'The temperature step did not settle: the power is out of proportion to the part.',
  );
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
