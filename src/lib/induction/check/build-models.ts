/** From field solutions to models over frequency and current, for the cold and the hot part. */
import { arrangements, type Arrangement } from '../tank/bank.ts';
import type { AssumedMachine } from './assume.ts';
import { assumeMachine } from './assume.ts';
import {
  chebyshevPoints,
  coilModel,
  pointOf,
  type CoilModel,
  type CoilSource,
  type ModelPoint,
} from './coil-model.ts';
import {
  circuitOf,
  isFitted,
  rowSettings,
  type RowSetting,
  type StateModel,
  type StateName,
} from './ladder.ts';
import { operatingPoint } from './operating-point.ts';
import type { Geometry } from './resolve.ts';
import { coilSources } from './sensitivity.ts';
import type { CheckOptions, Question, Solver } from './solver.ts';
import type { ImpedanceAnswer, Machine } from './types.ts';

export interface Models {
  assumed: AssumedMachine;
  settings: RowSetting[];
  fitted: RowSetting;
  states: Record<StateName, StateModel>;
  /** Field solutions at the fitted row's own points. */
  nominal: Record<StateName, ImpedanceAnswer>;
  startFrequency: number;
}

const states: readonly StateName[] = ['cold', 'hot'];

/** Settings per tap, so that the whole ladder stays readable (and its record small). */
function mostRows(machine: Machine): number {
  return Math.max(6, Math.floor(64 / (machine.transformer?.ratios.length ?? 1)));
}

/** Whether the coil current changes the part's permeability in a state. */
function isMagnetic(geometry: Geometry, state: StateName, targetC: number, startC: number): boolean {
  const law = geometry.material?.magnetisation;
  if (!law) return false;
  if (state === 'cold') return startC < law.curieC;
  // A hot layer over a cold core: the core is magnetic still.
  return targetC < law.curieC || (geometry.part?.depthWanted ?? null) !== null;
}

/** The setting that stands for the machine: the fitted one, else the middle of the list. */
function fittedSetting(settings: readonly RowSetting[], assumed: AssumedMachine): RowSetting | null {
  return (
    settings.find((setting) => isFitted(setting, assumed)) ??
    settings.find((setting) => setting.arrangement.fitted) ??
    settings[Math.floor(settings.length / 2)] ??
    null
  );
}

/**
 * @param guess a first frequency and inductance, from the cheap estimate or the middle of the supply's range
 * @returns null where the bank has no setting or the method gives no impedance
 */
export function buildModels(
  solver: Solver,
  geometry: Geometry,
  machine: Machine,
  process: { startTemperatureC: number; targetTemperatureC: number },
  guess: { inductance: number; frequency: number },
  options: CheckOptions,
): Models | null {
  const bank: Arrangement[] = arrangements(machine.bank, mostRows(machine));
  const ask = (state: StateName, frequency: number, current: number, setting: CheckOptions['setting']) =>
    solver.ask({
      coil: geometry.coil,
      part: geometry.part,
      frequency,
      state,
      current,
      includeLeads: true,
      setting,
    });
  const first = ask('hot', guess.frequency, 500, 'preview');
  if (!first || bank.length === 0) return null;
  const assumed = assumeMachine(machine, {
    inductance: first.inductance,
    resistance: first.resistance,
  });
  const settings = rowSettings(assumed, bank);
  const fitted = fittedSetting(settings, assumed);
  if (!fitted) return null;
  const found: Partial<Record<StateName, StateModel>> = {};
  const nominal: Partial<Record<StateName, ImpedanceAnswer>> = {};
  let last = { frequency: guess.frequency, current: 500 };
  for (const state of states) {
    const magnetic = isMagnetic(geometry, state, process.targetTemperatureC, process.startTemperatureC);
    const rough = roughPoint(assumed, fitted, magnetic, last, (f, i) => ask(state, f, i, 'preview'));
    if (!rough) return null;
    last = { frequency: rough.frequency, current: rough.current };
    const span = spanOf(assumed, settings, rough.model, rough);
    const model = gridModel(span, rough, { magnetic, state, setting: options.setting }, (f, i, setting) =>
      ask(state, f, i, setting),
    );
    if (!model) return null;
    const point = operatingPoint(circuitOf(assumed, fitted), model, assumed.limits, rough);
    if (!point) return null;
    const answer = ask(state, point.frequency, point.current, options.setting);
    if (!answer) return null;
    nominal[state] = answer;
    found[state] = {
      model,
      current: point.current,
      sources: sourcesOf(solver, geometry, state, point, answer, magnetic, options),
    };
  }
  const { cold, hot } = found;
  const { cold: coldAnswer, hot: hotAnswer } = nominal;
  if (!cold || !hot || !coldAnswer || !hotAnswer) return null;
  return {
    assumed,
    settings,
    fitted,
    states: { cold, hot },
    nominal: { cold: coldAnswer, hot: hotAnswer },
    startFrequency: guess.frequency,
  };
}

interface Rough {
  frequency: number;
  current: number;
  model: CoilModel;
}

/** Fitted row from preview solutions, current consistent with its deliverable power to a few per cent. */
function roughPoint(
  assumed: AssumedMachine,
  fitted: RowSetting,
  magnetic: boolean,
  start: { frequency: number; current: number },
  ask: (frequency: number, current: number) => ImpedanceAnswer | null,
): Rough | null {
  let { frequency, current } = start;
  for (let i = 0; i < (magnetic ? 5 : 2); i++) {
    const answer = ask(frequency, current);
    if (!answer) return null;
    const model = coilModel([frequency], [current], [[pointOf(answer)]]);
    const point = operatingPoint(circuitOf(assumed, fitted), model, assumed.limits, { frequency, current });
    if (!point) return null;
    const settled =
      Math.abs(point.frequency / frequency - 1) < 0.02 && Math.abs(point.current / current - 1) < 0.05;
    frequency = point.frequency;
    current = point.current;
    if (settled || i === (magnetic ? 4 : 1)) return { frequency, current, model };
  }
  return null;
}

/** Frequencies and currents over all rows, from one rough impedance, with room for what the model still moves. */
function spanOf(
  assumed: AssumedMachine,
  settings: readonly RowSetting[],
  model: CoilModel,
  start: { frequency: number; current: number },
): { frequency: [number, number]; current: [number, number] } {
  const points = settings.flatMap(
    (setting) => operatingPoint(circuitOf(assumed, setting), model, assumed.limits, start) ?? [],
  );
  const range = (values: number[], room: number): [number, number] => [
    Math.min(...values) / room,
    Math.max(...values) * room,
  ];
  return {
    frequency: range([start.frequency, ...points.map((p) => p.frequency)], 1.06),
    current: range([start.current, ...points.map((p) => p.current)], 1.25),
  };
}

type AskAt = (frequency: number, current: number, setting: CheckOptions['setting']) => ImpedanceAnswer | null;

/**
 * Impedance over the span, solved with the setting of the check at the rough current. Where the permeability moves with
 * current, what a change of current does is taken from preview solutions at one or two frequencies over the rows'
 * currents: it hardly depends on frequency.
 */
function gridModel(
  span: { frequency: [number, number]; current: [number, number] },
  rough: Rough,
  how: { magnetic: boolean; state: StateName; setting: CheckOptions['setting'] },
  ask: AskAt,
): CoilModel | null {
  const ratio = span.frequency[1] / span.frequency[0];
  const plain = ratio < 1.3 ? 3 : ratio < 2 ? 4 : ratio < 3 ? 5 : 6;
  // Each point of saturating steel costs ten of the others, and its own error is far above that of one point less.
  const full = how.magnetic ? Math.min(4, plain) : plain;
  const light = how.setting === 'preview';
  const frequencies = chebyshevPoints(span.frequency[0], span.frequency[1], light ? 3 : full);
  const exact = solveGrid(frequencies, [rough.current], (f, i) => ask(f, i, how.setting));
  if (!exact || !how.magnetic) return exact;
  const weak = light || how.state === 'hot';
  const variation = solveGrid(
    chebyshevPoints(span.frequency[0], span.frequency[1], weak ? 1 : 2),
    chebyshevPoints(span.current[0], span.current[1], weak ? 2 : 3),
    (f, i) => ask(f, i, 'preview'),
  );
  return variation ? withCurrent(exact, variation, rough.current) : null;
}

function solveGrid(
  frequencies: readonly number[],
  currents: readonly number[],
  ask: (frequency: number, current: number) => ImpedanceAnswer | null,
): CoilModel | null {
  const points: ModelPoint[][] = [];
  for (const f of frequencies) {
    const row: ModelPoint[] = [];
    for (const i of currents) {
      const answer = ask(f, i);
      if (!answer) return null;
      row.push(pointOf(answer));
    }
    points.push(row);
  }
  return coilModel(frequencies, currents, points);
}

function withCurrent(exact: CoilModel, variation: CoilModel, current: number): CoilModel {
  return {
    currentDependent: true,
    at(frequency, i) {
      const base = exact.at(frequency, current);
      const there = variation.at(frequency, i);
      const here = variation.at(frequency, current);
      return {
        inductance: (base.inductance * there.inductance) / here.inductance,
        coilResistance: (base.coilResistance * there.coilResistance) / here.coilResistance,
        loadResistance: (base.loadResistance * there.loadResistance) / here.loadResistance,
      };
    },
  };
}

function sourcesOf(
  solver: Solver,
  geometry: Geometry,
  state: StateName,
  point: { frequency: number; current: number },
  nominal: ImpedanceAnswer,
  magnetic: boolean,
  options: CheckOptions,
): CoilSource[] {
  const question: Question = {
    coil: geometry.coil,
    part: geometry.part,
    frequency: point.frequency,
    state,
    current: point.current,
    includeLeads: true,
    setting: options.setting,
  };
  if (options.bands === false) {
    const shift = {
      inductance: nominal.inductanceError,
      coilResistance: nominal.resistanceError,
      loadResistance: nominal.resistanceError,
    };
    return [{ name: 'error of the method', variation: { value: nominal.inductanceError, unit: '1' }, shift }];
  }
  return coilSources(solver, {
    question,
    nominal,
    material: geometry.material,
    magnetic,
    gapBetweenTurns: gapBetweenTurns(geometry),
  });
}

/** Clear distance between neighbouring turns, m; Infinity for one turn. */
export function gapBetweenTurns(geometry: Geometry): number {
  const { rings, section } = geometry;
  if (!rings || !section || rings.rings.length < 2) return Infinity;
  let least = Infinity;
  for (let i = 1; i < rings.rings.length; i++) {
    const a = rings.rings[i - 1];
    const b = rings.rings[i];
    if (!a || !b) continue;
    const dr = Math.abs(a.radius - b.radius);
    const dz = Math.abs(a.z - b.z);
    const gap =
      section.kind === 'round'
        ? Math.hypot(dr, dz) - 2 * section.radius
        : Math.hypot(Math.max(0, dr - 2 * section.halfRadial), Math.max(0, dz - 2 * section.halfAxial));
    least = Math.min(least, gap);
  }
  return least;
}
