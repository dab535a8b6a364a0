/** One row in one thermal state: frequency, deliverable power and the coil current that belongs to it. */
import {
  circuitState,
  inputImpedance,
  tankBranch,
  type CircuitState,
  type TankCircuit,
} from '../tank/circuit.ts';
import { deliverablePower, type Deliverable, type SupplyLimits } from '../tank/deliverable.ts';
import { resonance } from '../tank/resonance.ts';
import type { CoilModel, ModelPoint } from './coil-model.ts';

export interface OperatingPoint {
  frequency: number;
  lossless: number;
  zeroPhase: boolean;
  current: number;
  point: ModelPoint;
  deliverable: Deliverable;
  state: CircuitState;
  /** Inductance and resistance against the bank. */
  branch: { inductance: number; resistance: number };
}

const terminal = (p: ModelPoint) => ({
  inductance: p.inductance,
  resistance: p.coilResistance + p.loadResistance,
});

/**
 * Operating point with the coil current consistent with the deliverable power: both frequency and current are iterated
 * to 1e-5 and better. The current matters only where the part is magnetic.
 *
 * @returns null where the circuit has no resonance
 */
export function operatingPoint(
  circuit: TankCircuit,
  model: Pick<CoilModel, 'at' | 'currentDependent'>,
  limits: SupplyLimits,
  start: { frequency: number; current: number },
): OperatingPoint | null {
  let current = start.current;
  let guess = start.frequency;
  let result: OperatingPoint | null = null;
  for (let i = 0; i < 40; i++) {
    const at = (f: number) => model.at(f, current);
    const found = resonance(circuit, (f) => terminal(at(f)), guess);
    if (!Number.isFinite(found.frequency)) return null;
    const point = at(found.frequency);
    const coil = terminal(point);
    const deliverable = deliverablePower(circuit, coil, found.frequency, limits);
    if (!(deliverable.power > 0) || !Number.isFinite(deliverable.power)) return null;
    const state = circuitState(circuit, coil, found.frequency, deliverable.power);
    result = {
      ...found,
      current: state.coilCurrent,
      point,
      deliverable,
      state,
      branch: tankBranch(circuit, coil, found.frequency),
    };
    const step = Math.log(state.coilCurrent / current);
    if (!model.currentDependent || Math.abs(step) < 1e-6) return result;
    guess = found.frequency;
    // More current means less permeability means less resistance: damping keeps the iteration from swinging.
    current *= Math.exp(0.7 * step);
  }
  return result;
}

/**
 * The same point with something moved a little, permeability frozen (current held): secant from the nominal frequency.
 */
export function movedPoint(
  circuit: TankCircuit,
  coilAt: (frequency: number) => ModelPoint,
  limits: SupplyLimits,
  nominal: OperatingPoint,
): OperatingPoint | null {
  const frequency = nominal.zeroPhase
    ? secant((f) => inputImpedance(circuit, terminal(coilAt(f)), f).im, nominal.frequency)
    : losslessNear(circuit, coilAt, nominal.frequency);
  if (frequency === null) return null;
  const point = coilAt(frequency);
  const coil = terminal(point);
  const deliverable = deliverablePower(circuit, coil, frequency, limits);
  if (!(deliverable.power > 0)) return null;
  const state = circuitState(circuit, coil, frequency, deliverable.power);
  const branch = tankBranch(circuit, coil, frequency);
  return {
    frequency,
    lossless: 1 / (2 * Math.PI * Math.sqrt(branch.inductance * circuit.capacitance)),
    zeroPhase: nominal.zeroPhase,
    current: state.coilCurrent,
    point,
    deliverable,
    state,
    branch,
  };
}

function losslessNear(circuit: TankCircuit, coilAt: (f: number) => ModelPoint, start: number): number | null {
  let f = start;
  for (let i = 0; i < 20; i++) {
    const { inductance } = tankBranch(circuit, terminal(coilAt(f)), f);
    if (!(inductance > 0)) return null;
    f = 1 / (2 * Math.PI * Math.sqrt(inductance * circuit.capacitance));
  }
  return f;
}

function secant(g: (f: number) => number, start: number): number | null {
  let a = start;
  let b = start * (1 + 1e-3);
  let ga = g(a);
  let gb = g(b);
  for (let i = 0; i < 25; i++) {
    if (gb === ga) return Math.abs(gb) < 1e-12 ? b : null;
    const next = b - (gb * (b - a)) / (gb - ga);
    // Beyond this the tolerance has taken the tank out of reach of a small move.
    if (!(next > start * 0.6 && next < start * 1.6)) return null;
    [a, ga] = [b, gb];
    b = next;
    gb = g(b);
    if (Math.abs(b - a) < 1e-9 * b) return b;
  }
  return null;
}
