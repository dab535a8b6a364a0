import type { AsBuiltBody, AsBuiltValue, LineVerdict } from '../../domain/as-built.ts';
import type { Verdict } from '../../domain/piece-states.ts';
import { verdictOf } from '../../induction/check/as-built.ts';
import type { AcceptanceLine } from '../../induction/check/types.ts';

const isNumeric = (line: AcceptanceLine) => line.low !== null || line.high !== null;

function judgeNumber(line: AcceptanceLine, given: AsBuiltValue): { verdict: Verdict; remark: string } {
  if (given.value === null) return { verdict: 'fail', remark: 'not measured' };
  const verdict = verdictOf(given.value, line.low, line.high, given.uncertainty);
  const below = line.low !== null && given.value < line.low;
  const remark = {
    pass: '',
    'pass-with-remark': 'within the measurement uncertainty of the limit',
    fail: below ? 'below the lower limit' : 'above the upper limit',
  }[verdict === 'missing' ? 'fail' : verdict];
  return { verdict: verdict === 'missing' ? 'fail' : verdict, remark };
}

/**
 * Judges a record line by line against the acceptance lines of the order specification. SI units on both
 * sides; `uncertainty` is the expanded uncertainty (k = 2) in the unit of the line. A value within
 * its uncertainty of a limit, on either side, passes with remark; beyond a limit by more than that it fails; a line left out fails. Documents and yes/no tests go by their tick.
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
