import type { AsBuiltBody, AsBuiltValue, LineVerdict } from '../../domain/as-built.ts';
import type { Verdict } from '../../domain/piece-states.ts';
import type { AcceptanceLine } from '../../induction/check/types.ts';

const isNumeric = (line: AcceptanceLine) => line.low !== null || line.high !== null;

function judgeNumber(line: AcceptanceLine, given: AsBuiltValue): { verdict: Verdict; remark: string } {
  if (given.value === null) return { verdict: 'fail', remark: 'not measured' };
  const below = line.low === null ? Infinity : given.value - line.low;
  const above = line.high === null ? Infinity : line.high - given.value;
  const inside = Math.min(below, above);
  if (inside >= given.uncertainty) return { verdict: 'pass', remark: '' };
  if (inside >= -given.uncertainty && given.uncertainty > 0) {
    return { verdict: 'pass-with-remark', remark: 'within the measurement uncertainty of the limit' };
  }
  return inside >= 0
    ? { verdict: 'pass', remark: '' }
    : { verdict: 'fail', remark: below < 0 ? 'below the lower limit' : 'above the upper limit' };
}

/**
 * Judges a record line by line against the acceptance lines of the order specification. SI units on both
 * sides; `uncertainty` is the expanded uncertainty (k = 2) in the unit of the line. A value at least its
 * uncertainty inside the limits passes, one within its uncertainty of a limit passes with remark, beyond
 * that it fails; a line left out fails. Documents and yes/no tests go by their tick.
 */
export function judgeRecord(
  lines: readonly AcceptanceLine[],
  body: Pick<AsBuiltBody, 'values'>,
): { lines: LineVerdict[]; verdict: Verdict } {
  const judged = lines.map((line): LineVerdict => {
    const given = body.values.find((value) => value.lineId === line.id);
    const base = {
      lineId: line.id,
      label: line.label,
      kind: line.kind,
      unit: line.unit,
      value: given?.value ?? null,
      low: line.low,
      high: line.high,
      uncertainty: given?.uncertainty ?? 0,
    };
    if (!given) return { ...base, verdict: 'fail', remark: 'not measured' };
    if (isNumeric(line)) return { ...base, ...judgeNumber(line, given) };
    return given.passed === true
      ? { ...base, verdict: 'pass', remark: '' }
      : { ...base, verdict: 'fail', remark: given.passed === null ? 'not answered' : 'not passed' };
  });
  const verdict: Verdict = judged.some((line) => line.verdict === 'fail')
    ? 'fail'
    : judged.some((line) => line.verdict === 'pass-with-remark')
      ? 'pass-with-remark'
      : 'pass';
  return { lines: judged, verdict };
}
