import type { AcceptanceKind, Unit } from '../induction/check/types.ts';
import type { Verdict } from './piece-states.ts';

/** One measured acceptance line of an as-built record; SI units, temperatures in °C. */
export interface AsBuiltValue {
  lineId: string;
  /** null for documents and yes/no tests. */
  value: number | null;
  /** Expanded uncertainty of the measurement (k = 2), same unit; 0 = not stated. */
  uncertainty: number;
  /** For documents and yes/no tests. */
  passed: boolean | null;
  instrument: string;
  /** YYYY-MM-DD, or empty. */
  calibrationDate: string;
  note: string;
}

/** The as-built record of one piece (inspection report). */
export interface AsBuiltBody {
  values: AsBuiltValue[];
  /** Test frequency used for inductance, Hz. */
  testFrequency: number | null;
  temperatureC: number | null;
  leadState: string;
  /** Open/short compensation of the instrument. */
  compensation: string;
  measuredOn: string;
  note: string;
}

export interface LineVerdict {
  lineId: string;
  label: string;
  kind: AcceptanceKind;
  unit: Unit;
  value: number | null;
  low: number | null;
  high: number | null;
  uncertainty: number;
  verdict: Verdict;
  remark: string;
}

/** What the checker makes of a measured coil, towards its place on the machine. Figures are SI. */
export interface AsBuiltOutcome {
  /** How the measurement was carried to the operating point, in words. */
  explanation: string;
  /** The bank setting that now tunes it; null where the method gives none. */
  advised: {
    label: string;
    reason: string;
    capacitance: number;
    frequencyHot: number;
    deliverablePower: number;
    fits: boolean;
    /** Whether it is what the specification advised. */
    asPredicted: boolean;
  } | null;
  comparisons: { name: string; unit: Unit; predicted: number; low: number; high: number; measured: number }[];
}
