/** Calibration of a machine: what is fixed in it, from frequencies seen with a known coil. */

export interface CalibrationPoint {
  /** Capacitance of the bank setting, F. */
  capacitance: number;
  /** Frequency seen, Hz. */
  frequency: number;
}

export interface CalibrationInput {
  points: CalibrationPoint[];
  /** Inductance of the known coil at its contact faces, H, and its relative half band. */
  coilInductance: number;
  coilBand: number;
  /** Relative half band of the bank's capacitance and of the frequency reading. */
  capacitanceBand: number;
  frequencyBand: number;
  /** Primary turns per secondary turn when the bank is on the primary side; else 1. */
  ratio: number;
  /** Leakage inductance referred to the primary, H (0 without transformer). */
  leakage: number;
  /** Q of the tank, for the small shift of zero phase from 1/(2π√(LC)); null: neglected. */
  q: number | null;
}

export interface Calibrated {
  /** On the coil side, H. */
  fixedInductance: number;
  fixedInductanceBand: number;
  /** Across the bank, F. May come out slightly negative when the bank is below its nameplate. */
  strayCapacitance: number;
  strayCapacitanceBand: number;
  /** Largest relative difference of a frequency from the fitted line. */
  residual: number;
}

export type CalibrationResult = { ok: true; calibrated: Calibrated } | { ok: false; message: string };

/**
 * Fits L and C₀ in (2πf)⁻² = L·(C + C₀) to two or more bank settings; L less the coil's is the fixed inductance.
 *
 * With y = (2πf)⁻²·(1 − 1/Q²) the points lie on a straight line over C of slope L and intercept L·C₀ (the factor is
 * the zero-phase shift of a parallel tank). With one bank setting only the inductance is found, stray taken as none.
 * The band: frequency and coil bands carried through by differences, the bank's common tolerance as one factor.
 * Source: least squares on the resonance condition (Thomson).
 */
export function calibrate(input: CalibrationInput): CalibrationResult {
  const problem = refuse(input);
  if (problem) return { ok: false, message: problem };
  const base = fit(input.points, input);
  if (!(base.tank > 0)) {
    return {
      ok: false,
      message: 'The frequencies do not fall with more capacitance: check which setting was which.',
    };
  }
  const fixedOf = (tank: number, coil: number, scaleC = 1) =>
    (tank / scaleC - input.leakage) / input.ratio ** 2 - coil;
  const fixed = fixedOf(base.tank, input.coilInductance);
  let fixedSquares = 0;
  let straySquares = 0;
  input.points.forEach((_, index) => {
    const moved = input.points.map((p, i) =>
      i === index ? { ...p, frequency: p.frequency * (1 + input.frequencyBand) } : p,
    );
    const other = fit(moved, input);
    fixedSquares += (fixedOf(other.tank, input.coilInductance) - fixed) ** 2;
    straySquares += (other.stray - base.stray) ** 2;
  });
  fixedSquares += (input.coilInductance * input.coilBand) ** 2;
  fixedSquares += (fixedOf(base.tank, input.coilInductance, 1 + input.capacitanceBand) - fixed) ** 2;
  straySquares += (base.stray * input.capacitanceBand) ** 2;
  const residual = Math.max(
    ...input.points.map((p) =>
      Math.abs(Math.sqrt(yOf(p, input.q) / (base.tank * (p.capacitance + base.stray))) - 1),
    ),
  );
  return {
    ok: true,
    calibrated: {
      fixedInductance: fixed,
      fixedInductanceBand: Math.sqrt(fixedSquares),
      strayCapacitance: base.stray,
      strayCapacitanceBand: Math.sqrt(straySquares),
      residual,
    },
  };
}

function yOf(point: CalibrationPoint, q: number | null): number {
  return (1 - (q === null ? 0 : 1 / q ** 2)) / (2 * Math.PI * point.frequency) ** 2;
}

function fit(points: readonly CalibrationPoint[], input: CalibrationInput): { tank: number; stray: number } {
  const n = points.length;
  const xs = points.map((p) => p.capacitance);
  const ys = points.map((p) => yOf(p, input.q));
  // Relative errors are equal, so each point weighs by 1/y².
  const w = ys.map((y) => 1 / (y * y));
  const sum = (f: (i: number) => number) => xs.reduce((total, _, i) => total + f(i), 0);
  const at = (list: readonly number[], i: number) => list[i] ?? Number.NaN;
  if (n === 1) return { tank: at(ys, 0) / at(xs, 0), stray: 0 };
  const s = sum((i) => at(w, i));
  const mx = sum((i) => at(w, i) * at(xs, i)) / s;
  const my = sum((i) => at(w, i) * at(ys, i)) / s;
  const slope =
    sum((i) => at(w, i) * (at(xs, i) - mx) * (at(ys, i) - my)) / sum((i) => at(w, i) * (at(xs, i) - mx) ** 2);
  return { tank: slope, stray: my / slope - mx };
}

function refuse(input: CalibrationInput): string | null {
  if (input.points.length === 0) return 'Give at least one bank setting with its frequency.';
  const positive = (value: number) => Number.isFinite(value) && value > 0;
  if (!input.points.every((p) => positive(p.capacitance) && positive(p.frequency))) {
    return 'Capacitances and frequencies must be positive numbers.';
  }
  if (!positive(input.coilInductance)) return 'The inductance of the known coil must be a positive number.';
  if (!positive(input.ratio)) return 'The transformer ratio must be a positive number.';
  const values = input.points.map((p) => p.capacitance);
  const spread = Math.max(...values) / Math.min(...values);
  if (input.points.length > 1 && spread < 1.05) {
    return 'The bank settings are too close together to tell inductance from stray capacitance.';
  }
  return null;
}
