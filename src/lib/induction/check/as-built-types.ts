/** As-built record of a finished coil and what the checker makes of it. SI units; temperatures in °C. */
import type { Figure, LadderRow, Unit } from './types.ts';

/** One measured value or test, against one acceptance line. */
export interface AsBuiltEntry {
  /** Id of the acceptance line. */
  lineId: string;
  /** null for a yes/no test or a document. */
  value: number | null;
  unit: Unit;
  /** Half width, in the unit of the value; null = not stated. */
  uncertainty: number | null;
  /** For yes/no tests and documents. */
  passed: boolean | null;
  /** For inductance and resistance, Hz. */
  testFrequency: number | null;
  note: string;
}

export interface AsBuiltRecord {
  instrument: string;
  /** YYYY-MM-DD */
  calibrationDate: string;
  /** Open/short compensation of the fixture, as stated. */
  compensation: string;
  temperatureC: number | null;
  measuringPlane: string;
  leadState: string;
  entries: AsBuiltEntry[];
  /** Measured on the finished coil; null = not measured. */
  insideDiameter: number | null;
  pitch: number | null;
}

export type LineVerdict = 'pass' | 'pass-with-remark' | 'fail' | 'missing';

export interface JudgedLine {
  lineId: string;
  label: string;
  verdict: LineVerdict;
  value: number | null;
  low: number | null;
  high: number | null;
  unit: Unit;
  remark: string;
}

/** How the measured inductance was carried to the operating point. */
export type CorrectionMethod = 'none' | 'dimensions' | 'dimensions-and-leads' | 'leads' | 'ratio';

export interface AsBuiltJudgement {
  lines: JudgedLine[];
  /** fail when a line fails, incomplete when one is missing. */
  overall: 'pass' | 'pass-with-remark' | 'fail' | 'incomplete';
  /** Predicted against measured, kept for the coil's history. */
  comparisons: { name: string; predicted: Figure; measured: number; difference: number }[];
  correction: { method: CorrectionMethod; addedInductance: number; factor: number; explanation: string };
  /** Ladder of the machine with the coil as measured; empty where the method gives none. */
  ladder: LadderRow[];
  advisedRow: LadderRow | null;
}
