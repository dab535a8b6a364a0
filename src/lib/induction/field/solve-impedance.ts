import type { Coil, ImpedanceAnswer, ImpedanceQuery, SolverSetting, Workpiece } from '../check/types.ts';
import { isAxisymmetric, partBody, ringCoil, type RingCoil } from '../coil/rings.ts';
import { InductionInputError, requireWithin } from '../input-error.ts';
import { copperResistivity, materialOf } from '../materials/material-of.ts';
import { coilBlock, solveField, type CoilBlock, type FieldSolution } from './coil-block.ts';
import { prepareGeometry, resolutionOf, type FieldGeometry } from './field-geometry.ts';
import { leadGeometry, leadResistance, type LeadGeometry } from './lead-circuit.ts';
import { loopImpedance } from './loop-impedance.ts';
import { isSaturating, partModel, solveParts } from './part-model.ts';
import type { PermeabilityMemory } from './permeability-memory.ts';
import { copperTemperature, partTemperature } from './thermal-state.ts';

/** A coil and part whose geometry is assembled; good for any frequency, material, temperature, current. */
export interface PreparedCoil {
  coil: Coil;
  part: Workpiece | null;
  setting: SolverSetting;
  rings: RingCoil;
  geometry: FieldGeometry;
  /** Factored coils by frequency and copper resistivity, the few last used. */
  blocks: Map<string, CoilBlock>;
  /** Leads and legs, once asked for; null when the coil has none entered. */
  leads: LeadGeometry | null | undefined;
}

/** One operating state of a prepared coil (the part of an impedance query that is not geometry). */
export type ImpedanceState = Pick<
  ImpedanceQuery,
  'frequency' | 'state' | 'startTemperatureC' | 'targetTemperatureC' | 'current' | 'includeLeads'
>;

/** Lowest and highest frequency answered, Hz. */
export const FREQUENCY_LIMITS = [1, 1e8] as const;

/**
 * Assembles the geometry of an axisymmetric coil, with its part or alone: the slow half of a solution.
 *
 * @throws InductionInputError for sizes that are open, impossible, overlapping or too many to solve
 */
export function prepareCoil(coil: Coil, part: Workpiece | null, setting: SolverSetting): PreparedCoil {
  const rings = ringCoil(coil, part);
  const bodies = part === null ? [] : [partBody(part, coil, rings)];
  const geometry = prepareGeometry(rings, bodies, resolutionOf(setting, rings, bodies));
  return { coil, part, setting, rings, geometry, blocks: new Map(), leads: undefined };
}

/** The factored coil at a frequency; the last four are kept. */
export function blockAt(prepared: PreparedCoil, frequency: number): CoilBlock {
  const rho = copperResistivity(prepared.coil.copperGrade, copperTemperature(prepared.coil));
  const key = `${frequency}:${rho}`;
  const known = prepared.blocks.get(key);
  if (known !== undefined) return known;
  const made = coilBlock(prepared.geometry, rho, frequency);
  const oldest = prepared.blocks.keys().next();
  if (prepared.blocks.size >= 4 && !oldest.done) prepared.blocks.delete(oldest.value);
  prepared.blocks.set(key, made);
  return made;
}

/** Impedance of a prepared coil in one state; see `solveImpedance`. */
export function impedanceAt(
  prepared: PreparedCoil,
  state: ImpedanceState,
  memory: PermeabilityMemory | null = null,
): ImpedanceAnswer {
  requireWithin(state.frequency, FREQUENCY_LIMITS[0], FREQUENCY_LIMITS[1], 'frequency', 'Frequency');
  requireWithin(state.current, 0, 1e7, 'current', 'Coil current');
  const block = blockAt(prepared, state.frequency);
  const { part } = prepared;
  const assumptions: string[] = ['Turns are solved as rings in series.'];
  let field: FieldSolution;
  let modelError: readonly [number, number] = errorsOf(prepared.setting, part !== null);
  if (part === null) {
    field = solveField(block, []);
  } else {
    const material = materialOf(part.material, state.targetTemperatureC);
    const t = partTemperature(part, state.state, state.startTemperatureC, state.targetTemperatureC);
    const load = prepared.geometry.loads[0];
    if (load === undefined) throw new InductionInputError('outside-method', 'part', 'The part is missing.');
    const model = partModel(
      prepared.geometry,
      load,
      material,
      t,
      state.frequency,
      state.current,
      part.heatedLength,
    );
    const scale = prepared.rings.turns / prepared.rings.rings.length;
    const saturating = isSaturating(model);
    const start = saturating ? (memory?.start(state.state, model) ?? null) : null;
    const rounds = start === null ? null : (memory?.rounds ?? null);
    const solved = solveParts(block, [model], () => state.current * scale, start && [start], rounds);
    field = solved.field;
    if (saturating) {
      const found = solved.permeability[0];
      if (found !== undefined && solved.converged) memory?.keep(state.state, model, found);
      modelError = [0.05, 0.05];
      assumptions.push(
        `Magnetic part: first-harmonic permeability at ${state.current.toPrecision(3)} A rms, no hysteresis loss.`,
      );
    }
    if (!solved.converged) {
      modelError = [0.1, 0.15];
      assumptions.push('The permeability of the part had not settled: the figures are less certain.');
    }
    assumptions.push(...placeAssumptions(prepared.coil, part, state));
  }
  return answerOf(prepared, state, field, modelError, assumptions);
}

function placeAssumptions(coil: Coil, part: Workpiece, state: ImpedanceState): string[] {
  const out: string[] = [];
  if (coil.winding.shape === 'pancake' && part.axialOffset !== 0) {
    out.push('Under a pancake the face gap places the part; the axial offset is not used.');
  }
  if (state.state === 'hot' && part.depthWanted !== null) {
    out.push('Hot: a layer of the depth wanted at target temperature over a core at start temperature.');
  }
  if (part.form === 'drawing')
    out.push('The part is taken as a plain cylinder or tube of its main dimensions.');
  return out;
}

/** Solver error alone (L, R) by setting, as fractions; measured against finite elements. */
function errorsOf(setting: SolverSetting, loaded: boolean): readonly [number, number] {
  if (setting === 'preview') return loaded ? [0.003, 0.01] : [0.002, 0.01];
  if (setting === 'fine') return loaded ? [0.0003, 0.002] : [0.0001, 0.001];
  return loaded ? [0.0005, 0.003] : [0.0002, 0.002];
}

function answerOf(
  prepared: PreparedCoil,
  state: ImpedanceState,
  field: FieldSolution,
  modelError: readonly [number, number],
  assumptions: string[],
): ImpedanceAnswer {
  const { rings } = prepared;
  const omega = 2 * Math.PI * state.frequency;
  const scale = rings.turns / rings.rings.length;
  let [inductanceError, resistanceError] = modelError;
  if (Math.abs(scale - 1) > 1e-9) {
    inductanceError = Math.hypot(inductanceError, 0.02);
    resistanceError = Math.hypot(resistanceError, 0.03);
    assumptions.push('A broken number of turns is solved as whole rings in the same length and scaled.');
  }
  const own = field.turnPower.reduce((sum, p) => sum + p, 0);
  // A part far thinner than its skin depth takes next to nothing: rounding must not make it negative.
  const load = Math.max(
    0,
    field.partPower.reduce((sum, p) => sum + p, 0),
  );
  const loadResistance = load * scale * scale;
  let resistance = own * scale + loadResistance;
  let inductance = (field.reactance / omega) * scale * scale;
  if (state.includeLeads) {
    prepared.leads ??= leadGeometry(prepared.coil, rings);
    const leads = prepared.leads;
    if (leads === null) assumptions.push('No leads are entered: the figures end at the turns.');
    else {
      const rho = copperResistivity(prepared.coil.copperGrade, copperTemperature(prepared.coil));
      const share = leads.inductance / inductance;
      inductance += leads.inductance;
      resistance += leadResistance(leads, rings.section, rho, state.frequency);
      // Two per cent of the coil for legs that are not drawn, and of the leads themselves.
      inductanceError = Math.hypot(inductanceError, 0.01, 0.02 * Math.min(1, Math.abs(share)));
      assumptions.push(
        'Leads as entered, legs one and a half tube sizes off the turns, closed at the contact face.',
      );
    }
  }
  return {
    inductance,
    resistance,
    loadResistance,
    efficiency: loadResistance / resistance,
    turnLossShare: field.turnPower.map((p) => p / own),
    turnVoltage: field.turnVoltage.map((v) => Math.hypot(v.re, v.im) * scale),
    method: 'boundary solution with exact tube interior and finite-element part',
    inductanceError,
    resistanceError,
    assumptions,
  };
}

const recent = new Map<string, PreparedCoil>();
/** A check asks for a dozen geometries (tolerances moved one by one), first with the part cold, then hot. */
const RECENT = 12;
/** Unknowns squared that are kept together: a matrix entry each in two geometry matrices, and as much in blocks. */
const RECENT_ENTRIES = 1.5e6;

const entriesOf = (prepared: PreparedCoil) => prepared.geometry.kept.length ** 2;

/** Makes room for one more: the least recently used go first. */
function forget(entries: number): void {
  let sum = entries;
  for (const one of recent.values()) sum += entriesOf(one);
  for (const [key, one] of recent) {
    if (recent.size < RECENT && sum <= RECENT_ENTRIES) return;
    recent.delete(key);
    sum -= entriesOf(one);
  }
}

/** Reuses the last geometries: ladders, cold/hot and bare/loaded pairs ask for the same many times. */
function prepareOnce(query: ImpedanceQuery): PreparedCoil {
  // NaN would read as null, which is a valid "not known": keep them apart.
  const key = JSON.stringify([query.coil, query.part, query.setting], (_, value: unknown) =>
    typeof value === 'number' && !Number.isFinite(value) ? String(value) : value,
  );
  const known = recent.get(key);
  if (known !== undefined) {
    recent.delete(key);
    recent.set(key, known);
    return known;
  }
  const prepared = prepareCoil(query.coil, query.part, query.setting);
  forget(entriesOf(prepared));
  recent.set(key, prepared);
  return prepared;
}

/**
 * Impedance of a coil, with or without its part, at one frequency and one thermal state.
 *
 * The coil's turns are rings in series, each with its own voltage; the air by a boundary integral
 * equation, the inside of round tubes exactly by mode, of rectangular tubes and of the part by quadratic
 * finite elements; steel by a first-harmonic permeability at the given current. Figures for 1 A rms, Ω
 * and H; `turnVoltage` in V per A.
 *
 * Range: 1 Hz – 100 MHz, 0.5 – 200 turns, gaps above 3 % of the tube. The last few geometries are kept, so that
 * asking for further frequencies or states of the same coil and part costs about half.
 *
 * @param memory where a saturating part starts from, and what it leaves for the next question; null: from an estimate
 * @throws InductionInputError for input that cannot be computed, with a plain message and the field
 * Source: solver note of this project; Kress, Linear Integral Equations (1989); Johnson & Nédélec (1980).
 */
export function solveImpedance(
  query: ImpedanceQuery,
  memory: PermeabilityMemory | null = null,
): ImpedanceAnswer {
  if (!isAxisymmetric(query.coil.winding)) {
    requireWithin(query.frequency, FREQUENCY_LIMITS[0], FREQUENCY_LIMITS[1], 'frequency', 'Frequency');
    return loopImpedance(query);
  }
  return impedanceAt(prepareOnce(query), query, memory);
}
