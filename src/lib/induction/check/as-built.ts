/** A finished coil against its order: verdict per line, and the bank setting that now tunes it. */
import type {
  AsBuiltEntry,
  AsBuiltJudgement,
  AsBuiltRecord,
  CorrectionMethod,
  JudgedLine,
  LineVerdict,
} from './as-built-types.ts';
import { examine } from './examine.ts';
import { resolveGeometry } from './resolve.ts';
import { Solver, type CheckOptions } from './solver.ts';
import type { AcceptanceLine, CheckResult, Figure, Requirement } from './types.ts';

const documentKinds = new Set<AcceptanceLine['kind']>(['document', 'insulation', 'other']);

/**
 * Verdict of one value: a value within its uncertainty of a limit, on either side, passes with a remark.
 *
 * @param uncertainty half width in the unit of the value, 0 when not stated
 */
export function verdictOf(
  value: number,
  low: number | null,
  high: number | null,
  uncertainty: number,
): LineVerdict {
  const near = (limit: number | null) => limit !== null && Math.abs(value - limit) <= uncertainty;
  if (near(low) || near(high)) return 'pass-with-remark';
  if ((low !== null && value < low) || (high !== null && value > high)) return 'fail';
  return 'pass';
}

/** Limits of a line: its own, else those the check proposes for the same kind. */
function limitsOf(line: AcceptanceLine, check: CheckResult): { low: number | null; high: number | null } {
  if (line.low !== null || line.high !== null || line.basis !== 'computed')
    return { low: line.low, high: line.high };
  const proposed = check.proposedAcceptance.find((one) => one.kind === line.kind);
  return { low: proposed?.low ?? null, high: proposed?.high ?? null };
}

function judgeLine(line: AcceptanceLine, entry: AsBuiltEntry | undefined, check: CheckResult): JudgedLine {
  const { low, high } = limitsOf(line, check);
  const base = {
    lineId: line.id,
    label: line.label,
    value: entry?.value ?? null,
    low,
    high,
    unit: line.unit,
  };
  if (!entry || (entry.value === null && entry.passed === null)) {
    return { ...base, verdict: 'missing', remark: 'No value was entered.' };
  }
  if (entry.passed !== null && (entry.value === null || documentKinds.has(line.kind))) {
    return { ...base, verdict: entry.passed ? 'pass' : 'fail', remark: entry.note };
  }
  const value = entry.value;
  if (value === null || !Number.isFinite(value))
    return { ...base, verdict: 'missing', remark: 'The value is not a number.' };
  // A test that was done and stated as failed fails whatever the number says (a leak at full pressure).
  if (entry.passed === false)
    return { ...base, verdict: 'fail', remark: entry.note || 'Stated as not passed.' };
  if (low === null && high === null)
    return { ...base, verdict: 'pass-with-remark', remark: 'Recorded; the line sets no limits.' };
  const verdict = verdictOf(value, low, high, entry.uncertainty ?? 0);
  const remarks = [
    verdict === 'pass-with-remark' ? 'Within the uncertainty of the limit.' : '',
    entry.uncertainty === null && verdict === 'pass' ? 'No uncertainty was stated.' : '',
    line.testFrequency !== null &&
    entry.testFrequency !== null &&
    Math.abs(entry.testFrequency / line.testFrequency - 1) > 0.02
      ? 'Measured at another frequency than asked.'
      : '',
  ].filter((text) => text !== '');
  return { ...base, verdict, remark: remarks.join(' ') };
}

function overallOf(lines: readonly JudgedLine[]): AsBuiltJudgement['overall'] {
  if (lines.some((line) => line.verdict === 'fail')) return 'fail';
  if (lines.some((line) => line.verdict === 'missing')) return 'incomplete';
  return lines.some((line) => line.verdict === 'pass-with-remark') ? 'pass-with-remark' : 'pass';
}

/** The requirement with the measured opening and pitch in place of the nominal ones. */
export function withMeasuredDimensions(requirement: Requirement, record: AsBuiltRecord): Requirement | null {
  const { winding } = requirement.coil;
  let next = winding;
  if (record.insideDiameter !== null) {
    if (next.shape === 'helix' || next.shape === 'single-turn' || next.shape === 'pancake')
      next = { ...next, insideDiameter: record.insideDiameter };
    else if (next.shape === 'bore') next = { ...next, outsideDiameter: record.insideDiameter };
  }
  if (record.pitch !== null && 'pitch' in next) next = { ...next, pitch: record.pitch };
  return next === winding ? null : { ...requirement, coil: { ...requirement.coil, winding: next } };
}

interface Correction {
  method: CorrectionMethod;
  addedInductance: number;
  factor: number;
  explanation: string;
}

/**
 * Judges a finished coil.
 *
 * Towards the operating point measured dimensions are re-solved first; what remains of the inductance difference is
 * added as lead inductance; only where neither dimensions nor leads are known a plain ratio is used, and it says so.
 *
 * @param requirement of the order specification
 * @param check stored with it
 * @param options solver setting (default) and the usual hooks
 */
export function judgeAsBuilt(
  requirement: Requirement,
  check: CheckResult,
  record: AsBuiltRecord,
  options: Partial<CheckOptions> = {},
): AsBuiltJudgement {
  const lines = requirement.acceptance.map((line) =>
    judgeLine(
      line,
      record.entries.find((entry) => entry.lineId === line.id),
      check,
    ),
  );
  const comparisons = comparisonsOf(requirement, check, record);
  const settings: CheckOptions = { setting: 'default', ...options };
  const measured = measuredInductance(requirement, check, record);
  const resized = withMeasuredDimensions(requirement, record);
  const base = resized ?? requirement;
  const correction =
    measured === null
      ? withoutInductance(resized !== null)
      : correct(base, measured, resized !== null, settings);
  const unchanged = measured === null && resized === null;
  const context = unchanged
    ? null
    : examine(base, {
        ...settings,
        measured: { addedInductance: correction.addedInductance, factor: correction.factor },
      });
  const ladder = context ? context.ladder : check.ladder;
  return {
    lines,
    overall: overallOf(lines),
    comparisons,
    correction,
    ladder,
    advisedRow: ladder.find((row) => row.advised) ?? null,
  };
}

function withoutInductance(resized: boolean): Correction {
  return {
    method: resized ? 'dimensions' : 'none',
    addedInductance: 0,
    factor: 1,
    explanation: resized
      ? 'Measured dimensions were solved again; no inductance was measured.'
      : 'Neither dimensions nor inductance were measured: the ladder is the predicted one.',
  };
}

function measuredInductance(requirement: Requirement, check: CheckResult, record: AsBuiltRecord) {
  const line = requirement.acceptance.find((one) => one.kind === 'inductance');
  const entry = line && record.entries.find((one) => one.lineId === line.id);
  if (!line || !entry || entry.value === null || !(entry.value > 0)) return null;
  const frequency = entry.testFrequency ?? line.testFrequency ?? check.bareAtTest?.frequency ?? 20e3;
  return { value: entry.value, frequency };
}

/** What turns the computed bare inductance into the measured one. */
function correct(
  requirement: Requirement,
  measured: { value: number; frequency: number },
  resized: boolean,
  options: CheckOptions,
): Correction {
  const geometry = resolveGeometry(requirement);
  const solver = new Solver(requirement, { setting: options.setting });
  const computed = geometry.section
    ? solver.ask({
        coil: geometry.coil,
        part: null,
        frequency: measured.frequency,
        state: 'cold',
        current: 1,
        includeLeads: true,
        setting: options.setting,
      })
    : null;
  if (!computed) {
    return {
      method: 'none',
      addedInductance: 0,
      factor: 1,
      explanation: 'The bare coil could not be computed: no correction.',
    };
  }
  const rest = measured.value - computed.inductance;
  const leadsKnown = requirement.coil.leads !== null;
  if (resized || leadsKnown) {
    return {
      method: resized ? 'dimensions-and-leads' : 'leads',
      addedInductance: rest,
      factor: 1,
      explanation: resized
        ? 'Measured dimensions were solved again; the rest of the inductance difference is taken as lead inductance.'
        : 'No dimensions were measured: the inductance difference is taken as lead inductance.',
    };
  }
  return {
    method: 'ratio',
    addedInductance: 0,
    factor: measured.value / computed.inductance,
    explanation:
      'Neither dimensions nor leads are known: every inductance is scaled by measured over computed, a guess.',
  };
}

function comparisonsOf(
  requirement: Requirement,
  check: CheckResult,
  record: AsBuiltRecord,
): AsBuiltJudgement['comparisons'] {
  const predictions: Partial<Record<AcceptanceLine['kind'], Figure>> = {
    ...(check.bareAtTest
      ? { inductance: check.bareAtTest.inductance, resistance: check.bareAtTest.resistance }
      : {}),
    ...(check.water ? { flow: check.water.flow } : {}),
  };
  return requirement.acceptance.flatMap((line) => {
    const predicted = predictions[line.kind];
    const value = record.entries.find((entry) => entry.lineId === line.id)?.value ?? null;
    if (!predicted || value === null || !Number.isFinite(value)) return [];
    return [{ name: line.label, predicted, measured: value, difference: value / predicted.value - 1 }];
  });
}
