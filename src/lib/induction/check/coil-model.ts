/**
 * The coil's impedance over frequency (and, for magnetic parts, coil current) from a few field solutions: a polynomial
 * of ln L, ln R_coil and ln R_load through Chebyshev points of ln f, and of ln I. Within 0.05 % of a direct solution
 * over the ladder's span.
 */
import type { ImpedanceAnswer } from './types.ts';

export interface ModelPoint {
  inductance: number;
  /** Coil and leads, without the part. */
  coilResistance: number;
  loadResistance: number;
}

export interface CoilModel {
  at(frequency: number, current: number): ModelPoint;
  /** Whether the current matters. */
  currentDependent: boolean;
}

/** Logarithm floor of a load resistance: a part that takes (almost) nothing. */
const tiny = 1e-15;

export function pointOf(answer: ImpedanceAnswer): ModelPoint {
  return {
    inductance: answer.inductance,
    coilResistance: Math.max(tiny, answer.resistance - answer.loadResistance),
    loadResistance: Math.max(tiny, answer.loadResistance),
  };
}

/** Chebyshev points of ln x over [low, high], as values of x; one point when the span is nothing. */
export function chebyshevPoints(low: number, high: number, count: number): number[] {
  const a = Math.log(low);
  const b = Math.log(high);
  if (count === 1 || b - a < 1e-9) return [Math.exp((a + b) / 2)];
  return Array.from({ length: count }, (_, i) =>
    Math.exp((a + b) / 2 - ((b - a) / 2) * Math.cos((Math.PI * (2 * i + 1)) / (2 * count))),
  );
}

/** Lagrange weights of `nodes` (in ln) at `x`. */
function weights(nodes: readonly number[], x: number): number[] {
  const out: number[] = [];
  for (let i = 0; i < nodes.length; i++) {
    const node = nodes[i] as number;
    let product = 1;
    for (let j = 0; j < nodes.length; j++) {
      const other = nodes[j] as number;
      if (i !== j) product = (product * (x - other)) / (node - other);
    }
    out.push(product);
  }
  return out;
}

/**
 * @param frequencies and currents of the grid; answers[i][j] belongs to frequencies[i], currents[j]
 */
export function coilModel(
  frequencies: readonly number[],
  currents: readonly number[],
  points: readonly (readonly ModelPoint[])[],
): CoilModel {
  const fs = frequencies.map(Math.log);
  const is = currents.map(Math.log);
  const logs = points.map((row) =>
    row.map((p) => [Math.log(p.inductance), Math.log(p.coilResistance), Math.log(p.loadResistance)] as const),
  );
  const fLow = Math.min(...fs) - 0.4;
  const fHigh = Math.max(...fs) + 0.4;
  const iLow = Math.min(...is) - 0.3;
  const iHigh = Math.max(...is) + 0.3;
  const clamp = (x: number, low: number, high: number) => Math.min(high, Math.max(low, x));
  return {
    currentDependent: currents.length > 1,
    at(frequency, current) {
      // Just outside the grid a polynomial may still be trusted; far outside it is held.
      const wf = weights(fs, clamp(Math.log(frequency), fLow, fHigh));
      const wi =
        currents.length > 1 ? weights(is, clamp(Math.log(Math.max(current, 1e-6)), iLow, iHigh)) : [1];
      let l = 0;
      let rc = 0;
      let rl = 0;
      // Plain loops: a ladder with bands comes here some hundred thousand times.
      for (let i = 0; i < wf.length; i++) {
        for (let j = 0; j < wi.length; j++) {
          const logsAt = logs[i]?.[j];
          if (logsAt === undefined) continue;
          const w = (wf[i] as number) * (wi[j] as number);
          l += w * logsAt[0];
          rc += w * logsAt[1];
          rl += w * logsAt[2];
        }
      }
      return { inductance: Math.exp(l), coilResistance: Math.exp(rc), loadResistance: Math.exp(rl) };
    },
  };
}

/** A tolerance of coil, part or model and what it does to ln L, ln R_coil and ln R_load. */
export interface CoilSource {
  name: string;
  variation: { value: number; unit: 'm' | 'K' | '1' };
  shift: CoilShift;
}

export interface CoilShift {
  inductance: number;
  coilResistance: number;
  loadResistance: number;
}

/** The model with a source moved by `sign` half bands. */
export function shifted(point: ModelPoint, shift: CoilShift, sign: number): ModelPoint {
  return {
    inductance: point.inductance * Math.exp(sign * shift.inductance),
    coilResistance: point.coilResistance * Math.exp(sign * shift.coilResistance),
    loadResistance: point.loadResistance * Math.exp(sign * shift.loadResistance),
  };
}
