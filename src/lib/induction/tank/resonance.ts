/** Resonance with loss, exactly: the frequency at which the inverter sees no reactance. */
import { inputImpedance, tankBranch, type CoilImpedance, type TankCircuit } from './circuit.ts';

/** Coil impedance at a frequency; in a magnetic part it moves with frequency. */
export type CoilAtFrequency = (frequency: number) => CoilImpedance;

export interface Resonance {
  /** Hz */
  frequency: number;
  /** 1/(2π√(LC)) with the inductance at `frequency`, Hz. */
  lossless: number;
  /** False when loss is so high that there is no frequency of zero phase: then `frequency` is the lossless one. */
  zeroPhase: boolean;
}

/** f = 1/(2π√(LC)), Hz (Thomson). */
export function losslessFrequency(inductance: number, capacitance: number): number {
  return 1 / (2 * Math.PI * Math.sqrt(inductance * capacitance));
}

/**
 * Zero-phase frequency of a parallel tank of coil (L, R) and capacitor without loss, √(1/(LC) − (R/L)²)/2π, Hz.
 * @returns NaN when R ≥ √(L/C): there is none.
 */
export function parallelZeroPhaseFrequency(
  inductance: number,
  capacitance: number,
  resistance: number,
): number {
  return Math.sqrt(1 / (inductance * capacitance) - (resistance / inductance) ** 2) / (2 * Math.PI);
}

/** Frequency of the free (damped) oscillation, √(1/(LC) − (R/2L)²)/2π, Hz. */
export function dampedFrequency(inductance: number, capacitance: number, resistance: number): number {
  return Math.sqrt(1 / (inductance * capacitance) - (resistance / (2 * inductance)) ** 2) / (2 * Math.PI);
}

/**
 * Lossless resonance of the bank with the branch across it, iterated because the inductance moves with frequency.
 */
export function bankResonance(circuit: TankCircuit, coil: CoilAtFrequency, start: number): number {
  let f = start;
  for (let i = 0; i < 60; i++) {
    const branch = tankBranch(circuit, coil(f), f);
    if (!(branch.inductance > 0)) return Number.NaN;
    const next = losslessFrequency(branch.inductance, circuit.capacitance);
    if (Math.abs(next / f - 1) < 1e-9) return next;
    f = next;
  }
  return f;
}

/**
 * Operating frequency of a supply that follows resonance: zero phase at the inverter output, to 1e-9.
 *
 * Without a choke it is the zero-phase point next to the tank's own resonance. With a choke before a parallel tank
 * it is the one above, where the tank is capacitive and cancels the choke.
 *
 * @param start a first guess, Hz
 */
export function resonance(circuit: TankCircuit, coil: CoilAtFrequency, start: number): Resonance {
  const lossless = bankResonance(circuit, coil, start);
  if (!Number.isFinite(lossless)) return { frequency: Number.NaN, lossless: Number.NaN, zeroPhase: false };
  const reactance = (f: number) => inputImpedance(circuit, coil(f), f).im;
  const found = circuit.choke > 0 ? above(reactance, lossless) : nearest(reactance, lossless);
  return found === null
    ? { frequency: lossless, lossless, zeroPhase: false }
    : { frequency: found, lossless, zeroPhase: true };
}

const widest = 0.45;

/** Nearest sign change on either side, stepping outwards. */
function nearest(g: (f: number) => number, centre: number): number | null {
  const middle = g(centre);
  if (middle === 0) return centre;
  let low = centre;
  let high = centre;
  let gLow = middle;
  let gHigh = middle;
  for (let step = 2e-4; step < widest; step *= 1.5) {
    const nextLow = centre * (1 - step);
    const nextHigh = centre * (1 + step);
    const valueLow = g(nextLow);
    const valueHigh = g(nextHigh);
    if (valueLow * gLow < 0) return bisect(g, nextLow, low, valueLow);
    if (valueHigh * gHigh < 0) return bisect(g, high, nextHigh, gHigh);
    [low, gLow, high, gHigh] = [nextLow, valueLow, nextHigh, valueHigh];
  }
  return null;
}

/** First crossing from capacitive to inductive above the tank's resonance. */
function above(g: (f: number) => number, centre: number): number | null {
  let last = centre;
  let value = g(last);
  for (let f = centre * 1.002; f < 4 * centre; f *= 1.004) {
    const next = g(f);
    if (value < 0 && next >= 0) return bisect(g, last, f, value);
    [last, value] = [f, next];
  }
  return null;
}

/** Regula falsi with bisection safeguard (Illinois); `gLow` is g(low). */
function bisect(g: (f: number) => number, low: number, high: number, gLow: number): number {
  let a = low;
  let b = high;
  let fa = gLow;
  let fb = g(high);
  for (let i = 0; i < 80 && Math.abs(b - a) > 1e-10 * b; i++) {
    let c = (a * fb - b * fa) / (fb - fa);
    if (!(c > Math.min(a, b) && c < Math.max(a, b))) c = (a + b) / 2;
    const fc = g(c);
    if (fc === 0) return c;
    if (fc * fb < 0) {
      a = b;
      fa = fb;
    } else {
      fa /= 2;
    }
    b = c;
    fb = fc;
  }
  return b;
}
