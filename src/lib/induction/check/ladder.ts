/** The bank ladder: every bank setting on every tap, cold and hot, with bands, stresses and limits. */
import type { Arrangement } from '../tank/bank.ts';
import { unitStress } from '../tank/bank.ts';
import type { TankCircuit } from '../tank/circuit.ts';
import type { AssumedMachine } from './assume.ts';
import { shifted, type CoilModel, type CoilSource, type ModelPoint } from './coil-model.ts';
import { figure, type Effect } from './figure.ts';
import { movedPoint, operatingPoint, type OperatingPoint } from './operating-point.ts';
import type { Figure, LadderRow, LadderState, LimitCheck, OutputTransformer, Unit } from './types.ts';

export type StateName = 'cold' | 'hot';

/** Coil in one state: impedance over frequency and current, and what moves it. */
export interface StateModel {
  model: CoilModel;
  sources: CoilSource[];
  /** A current to start from. */
  current: number;
}

export interface RowSetting {
  arrangement: Arrangement;
  tap: number | null;
  ratio: number;
}

/** A row as solved, before it becomes text and bands. */
export interface SolvedRow {
  setting: RowSetting;
  circuit: TankCircuit;
  points: Record<StateName, OperatingPoint>;
}

export function circuitOf(assumed: AssumedMachine, setting: RowSetting): TankCircuit {
  return {
    ...assumed.circuit,
    ratio: setting.ratio,
    capacitance: setting.arrangement.capacitance + assumed.stray,
    lossTangent: setting.arrangement.lossTangent,
  };
}

export function rowSettings(assumed: AssumedMachine, rows: readonly Arrangement[]): RowSetting[] {
  return assumed.ratios.flatMap((ratio, index) =>
    rows.map((arrangement) => ({ arrangement, tap: assumed.fittedTap === null ? null : index, ratio })),
  );
}

export const isFitted = (setting: RowSetting, assumed: AssumedMachine): boolean =>
  setting.arrangement.fitted && setting.tap === assumed.fittedTap;

/** null where a row has no resonance. */
export function solveRow(
  assumed: AssumedMachine,
  setting: RowSetting,
  models: Record<StateName, StateModel>,
  startFrequency: number,
): SolvedRow | null {
  const circuit = circuitOf(assumed, setting);
  const solve = (state: StateName) =>
    operatingPoint(circuit, models[state].model, assumed.limits, {
      frequency: startFrequency,
      current: models[state].current,
    });
  const cold = solve('cold');
  const hot = solve('hot');
  return cold && hot ? { setting, circuit, points: { cold, hot } } : null;
}

/** What an operating point is asked for. */
export type Reading = (point: OperatingPoint) => number;

/**
 * What every tolerance of coil, part, bank and machine does to readings of one row in one state. One solved move per
 * source and side serves all readings.
 */
export function movedReadings(
  assumed: AssumedMachine,
  row: SolvedRow,
  state: StateName,
  model: StateModel,
): (reading: Reading) => Effect[] {
  const nominal = row.points[state];
  const at = (f: number) => model.model.at(f, nominal.current);
  const moves: {
    name: string;
    variation: Effect['variation'];
    up: OperatingPoint | null;
    down: OperatingPoint | null;
  }[] = [];
  const move = (circuit: TankCircuit, coilAt: (f: number) => ModelPoint) =>
    movedPoint(circuit, coilAt, assumed.limits, nominal);
  for (const source of model.sources) {
    const side = (sign: number) => move(row.circuit, (f) => shifted(at(f), source.shift, sign));
    moves.push({ name: source.name, variation: source.variation, up: side(1), down: side(-1) });
  }
  for (const source of assumed.sources) {
    const side = (sign: number) => move(source.apply(row.circuit, sign), at);
    moves.push({ name: source.name, variation: source.variation, up: side(1), down: side(-1) });
  }
  const tolerance = row.setting.arrangement.tolerance;
  if (tolerance > 0) {
    const half = tolerance * row.setting.arrangement.capacitance;
    const side = (sign: number) =>
      move({ ...row.circuit, capacitance: row.circuit.capacitance + sign * half }, at);
    moves.push({
      name: 'capacitance of the bank',
      variation: { value: half, unit: 'F' },
      up: side(1),
      down: side(-1),
    });
  }
  return (reading) => {
    const value = reading(nominal);
    return moves.map(({ name, variation, up, down }) => {
      const high = up ? reading(up) - value : Number.NaN;
      const low = down ? reading(down) - value : Number.NaN;
      const change =
        Number.isFinite(high) && Number.isFinite(low)
          ? (high - low) / 2
          : Number.isFinite(high)
            ? high
            : -low;
      return { name, variation, change };
    });
  };
}

/** Limits that are not the supply's own: bank units, transformer, per row and state. */
export function limitChecks(
  row: SolvedRow,
  point: OperatingPoint,
  transformer: OutputTransformer | null,
): LimitCheck[] {
  const checks: LimitCheck[] = [];
  const add = (name: string, value: number, limit: number | null, unit: Unit) => {
    if (limit !== null)
      checks.push({
        name,
        figure: { value, unit },
        limit: { value: limit, unit },
        met: value <= limit * (1 + 1e-9),
      });
  };
  const several = row.setting.arrangement.parts.length > 1;
  for (const stress of unitStress(
    row.setting.arrangement,
    point.state.bankVoltage,
    point.state.bankCurrent,
  )) {
    const of = several ? ` of a unit, ${stress.part.name}` : ' of a unit';
    add(`voltage${of}`, stress.voltage, stress.part.voltageLimit, 'V');
    add(`current${of}`, stress.current, stress.part.currentLimit, 'A');
    add(`reactive power${of}`, stress.reactivePower, stress.part.reactivePowerLimit, 'var');
  }
  if (transformer) {
    add(
      'transformer volts per hertz',
      point.state.transformerVoltage / point.frequency,
      transformer.voltsPerHertzLimit,
      '1',
    );
    add(
      'transformer apparent power',
      point.state.transformerVoltage * point.state.transformerCurrent,
      transformer.apparentPowerLimit,
      'VA',
    );
  }
  return checks;
}

/** Whether a frequency is in the supply's range; an open end is not checked. */
export function inRange(
  assumed: Pick<AssumedMachine, 'frequencyMin' | 'frequencyMax'>,
  frequency: number,
): boolean {
  return (
    (assumed.frequencyMin === null || frequency >= assumed.frequencyMin) &&
    (assumed.frequencyMax === null || frequency <= assumed.frequencyMax)
  );
}

/** What an assumed supply adds to the band of the deliverable power. */
export const unknownSupply = (assumed: Pick<AssumedMachine, 'powerBand'>, power: number): Effect[] =>
  assumed.powerBand > 0
    ? [
        {
          name: 'supply not known',
          variation: { value: assumed.powerBand, unit: '1' },
          change: power * assumed.powerBand,
        },
      ]
    : [];

/** Power that reaches the part at a point, W. */
export const partPower: Reading = (p) => p.state.coilCurrent ** 2 * p.point.loadResistance;

function ladderState(
  assumed: AssumedMachine,
  row: SolvedRow,
  state: StateName,
  model: StateModel,
  transformer: OutputTransformer | null,
): LadderState {
  const p = row.points[state];
  const effects = movedReadings(assumed, row, state, model);
  const stresses = unitStress(row.setting.arrangement, p.state.bankVoltage, p.state.bankCurrent);
  const worst = (f: (s: (typeof stresses)[number]) => number) => Math.max(0, ...stresses.map(f));
  const frequency = figure(
    p.frequency,
    'Hz',
    'zero phase at the inverter output',
    effects((x) => x.frequency),
    { least: 0 },
  );
  const deliverable: Figure = figure(
    p.deliverable.power,
    'W',
    'least of rated power, voltage limit and current limit into the reflected load',
    [...effects((x) => x.deliverable.power), ...unknownSupply(assumed, p.deliverable.power)],
    { least: 0 },
  );
  return {
    frequency,
    deliverablePower: deliverable,
    limitedBy: p.deliverable.limitedBy,
    powerIntoPart: partPower(p),
    coilCurrent: p.state.coilCurrent,
    coilVoltage: p.state.coilVoltage,
    bankCurrent: p.state.bankCurrent,
    bankVoltage: p.state.bankVoltage,
    reactivePower: p.state.reactivePower,
    unitVoltage: worst((s) => s.voltage),
    unitCurrent: worst((s) => s.current),
    unitReactivePower: worst((s) => s.reactivePower),
    inverterVoltage: p.state.inverterVoltage,
    inverterCurrent: p.state.inverterCurrent,
    inBand: inRange(assumed, p.frequency),
    limits: limitChecks(row, p, transformer),
  };
}

/** All rows with bands; the advised one is marked by `adviseRow`. */
export function ladderRows(
  assumed: AssumedMachine,
  rows: readonly SolvedRow[],
  models: Record<StateName, StateModel>,
  transformer: OutputTransformer | null,
): LadderRow[] {
  return rows.map((row) => {
    const cold = ladderState(assumed, row, 'cold', models.cold, transformer);
    const hot = ladderState(assumed, row, 'hot', models.hot, transformer);
    const { arrangement, tap, ratio } = row.setting;
    const onTap = tap === null ? '' : `, tap ${ratio}:1`;
    return {
      id: `${arrangement.id}${tap === null ? '' : `-tap-${tap}`}`,
      label: `${arrangement.label}${onTap}`,
      capacitance: arrangement.capacitance,
      unitsPerGroup: arrangement.unitsPerGroup,
      tap,
      ratio,
      fitted: isFitted(row.setting, assumed),
      advised: false,
      reason: '',
      cold,
      hot,
      fits: fits(cold) && fits(hot),
    };
  });
}

const fits = (state: LadderState) => state.inBand && state.limits.every((limit) => limit.met);

/** Power into the part over the cycle: the lower of the two states counts. */
const useful = (row: LadderRow) => Math.min(row.cold.powerIntoPart, row.hot.powerIntoPart);

/**
 * Marks the row with most deliverable power inside the band: among rows that meet every limit, else among rows inside
 * the band in both states. Rows within 2 % count as equal and the one further inside the band wins.
 */
export function adviseRow(
  rows: LadderRow[],
  assumed: Pick<AssumedMachine, 'frequencyMin' | 'frequencyMax'>,
): LadderRow | null {
  const inBand = rows.filter((row) => row.cold.inBand && row.hot.inBand);
  const fitting = inBand.filter((row) => row.fits);
  const pool = fitting.length > 0 ? fitting : inBand;
  const most = Math.max(0, ...pool.map(useful));
  const best = pool
    .filter((row) => useful(row) >= 0.98 * most)
    .sort((a, b) => Number(b.fitted) - Number(a.fitted) || inside(b, assumed) - inside(a, assumed))[0];
  if (!best) return null;
  best.advised = true;
  best.reason =
    fitting.length > 0
      ? 'Most power into the part with the frequency inside the supply’s range and every limit met.'
      : 'Most power into the part with the frequency inside the supply’s range; no setting meets every limit at full power.';
  return best;
}

/** Distance of both frequencies from the nearest end of the range, in ln f. */
function inside(
  row: LadderRow,
  { frequencyMin, frequencyMax }: Pick<AssumedMachine, 'frequencyMin' | 'frequencyMax'>,
): number {
  const low = Math.min(row.cold.frequency.value, row.hot.frequency.value);
  const high = Math.max(row.cold.frequency.value, row.hot.frequency.value);
  return Math.min(
    frequencyMin === null ? Infinity : Math.log(low / frequencyMin),
    frequencyMax === null ? Infinity : Math.log(frequencyMax / high),
  );
}
