/** Figures of the tank and the power chain, at the fitted row. */
import type { AssumedMachine } from './assume.ts';
import { figure } from './figure.ts';
import {
  movedReadings,
  partPower,
  unknownSupply,
  type Reading,
  type SolvedRow,
  type StateModel,
  type StateName,
} from './ladder.ts';
import type { ChainStep, Figure, TankFigures, Unit } from './types.ts';

const omega = (f: number) => 2 * Math.PI * f;

/** Q of the tank: reactance of the inductance against the bank over its resistance. */
export const tankQ: Reading = (p) => (omega(p.frequency) * p.branch.inductance) / p.branch.resistance;

/**
 * @param tapShare share of the coil's voltage up to its tap; null without tap
 */
export function tankFigures(
  assumed: AssumedMachine,
  row: SolvedRow,
  models: Record<StateName, StateModel>,
  tapShare: number | null,
): TankFigures {
  const hot = row.points.hot;
  const effects = movedReadings(assumed, row, 'hot', models.hot);
  const coldEffects = movedReadings(assumed, row, 'cold', models.cold);
  const zeroPhase = 'zero phase at the inverter output, circuit with loss';
  const of = (unit: Unit, method: string, reading: Reading, assumptions: string[] = []): Figure =>
    figure(reading(hot), unit, method, effects(reading), { assumptions, least: 0 });
  const atPower = ['At deliverable power, part hot.'];
  const primary = row.circuit.transformer !== null && row.circuit.bankSide === 'primary';
  return {
    kind: assumed.kind,
    capacitance: row.circuit.capacitance,
    inductance: of('H', 'coil, bus and transformer against the bank', (p) => p.branch.inductance),
    referredTo: primary ? 'primary side' : 'coil side',
    resonanceCold: figure(
      row.points.cold.frequency,
      'Hz',
      zeroPhase,
      coldEffects((p) => p.frequency),
      { least: 0 },
    ),
    resonanceHot: of('Hz', zeroPhase, (p) => p.frequency),
    operatingFrequency: of(
      'Hz',
      zeroPhase,
      (p) => p.frequency,
      hot.zeroPhase
        ? ['The supply follows zero phase.']
        : ['No zero-phase frequency at this loss: lossless resonance taken.'],
    ),
    q: of('1', 'ωL/R of the branch against the bank', tankQ),
    characteristicImpedance: of('ohm', '√(L/C)', (p) =>
      Math.sqrt(p.branch.inductance / row.circuit.capacitance),
    ),
    coilCurrent: of('A', 'circuit', (p) => p.state.coilCurrent, atPower),
    coilVoltage: of('V', 'circuit', (p) => p.state.coilVoltage, atPower),
    coilVoltageToTap:
      tapShare === null
        ? null
        : of('V', 'circuit, turns up to the tap', (p) => p.state.coilVoltage * tapShare, atPower),
    bankCurrent: of('A', 'circuit', (p) => p.state.bankCurrent, atPower),
    reactivePower: of('var', 'circuit', (p) => p.state.reactivePower, atPower),
    deliverablePower: figure(
      hot.deliverable.power,
      'W',
      'least of rated power, voltage limit and current limit',
      [...effects((p) => p.deliverable.power), ...unknownSupply(assumed, hot.deliverable.power)],
      { least: 0 },
    ),
    bankLoss: of('W', 'tan δ of the units', (p) => p.state.loss.bank, atPower),
    transformerLoss: of('W', 'winding resistance', (p) => p.state.loss.transformer, atPower),
  };
}

/**
 * The power's way from the inverter to the part at the fitted row, part hot. Losses and the part's power add up to what
 * leaves the inverter.
 *
 * @param leadShare share of the coil's own resistance (leads included) that is in the leads
 */
export function powerChain(
  assumed: AssumedMachine,
  row: SolvedRow,
  model: StateModel,
  leadShare: number | null,
): ChainStep[] {
  const p = row.points.hot;
  const effects = movedReadings(assumed, row, 'hot', model);
  const total = p.deliverable.power;
  const copper: Reading = (x) => x.state.coilCurrent ** 2 * x.point.coilResistance;
  const step = (name: ChainStep['name'], method: string, reading: Reading): ChainStep => ({
    name,
    power: figure(reading(p), 'W', method, effects(reading), { least: 0 }),
    share: reading(p) / total,
  });
  const bank = step('bank', 'tan δ of the units', (x) => x.state.loss.bank);
  const transformer = row.circuit.transformer
    ? [step('transformer', 'winding resistance', (x) => x.state.loss.transformer)]
    : [];
  const own = leadShare ?? 0;
  return [
    step('inverter', 'power that leaves the inverter', (x) => x.deliverable.power),
    ...(row.circuit.bankSide === 'primary' || !row.circuit.transformer
      ? [bank, ...transformer]
      : [...transformer, bank]),
    step('bus', 'resistance of bus and head', (x) => x.state.loss.bus),
    ...(leadShare === null ? [] : [step('leads', 'resistance of the leads', (x) => copper(x) * own)]),
    step('coil', 'field solution', (x) => copper(x) * (1 - own)),
    step('part', 'power that arrives in the part', partPower),
  ];
}
