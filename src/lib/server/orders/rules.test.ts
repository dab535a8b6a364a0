import { describe, expect, test } from 'vitest';
import type { AsBuiltValue } from '../../domain/as-built.ts';
import type { AcceptanceLine } from '../../induction/check/types.ts';
import { judgeRecord } from './rules.ts';

const line = (id: string, low: number | null, high: number | null): AcceptanceLine => ({
  id,
  kind: low === null && high === null ? 'document' : 'inductance',
  label: id,
  basis: 'computed',
  nominal: null,
  low,
  high,
  unit: 'H',
  testFrequency: null,
  temperatureC: null,
  measuringPlane: '',
  leadState: '',
  holdTime: null,
  differentialPressure: null,
  note: '',
});
const value = (
  lineId: string,
  number: number | null,
  uncertainty = 0,
  passed: boolean | null = null,
): AsBuiltValue => ({
  lineId,
  value: number,
  uncertainty,
  passed,
  instrument: '',
  calibrationDate: '',
  note: '',
});

describe('a measured line of 1.0 to 1.2', () => {
  test.each([
    [1.1, 0.01, 'pass'],
    [1.011, 0.01, 'pass'],
    [1.005, 0.01, 'pass-with-remark'],
    [0.995, 0.01, 'pass-with-remark'],
    [1.205, 0.01, 'pass-with-remark'],
    [0.98, 0.01, 'fail'],
    [1.22, 0.01, 'fail'],
    [1.21, 0, 'fail'],
    [null, 0, 'fail'],
  ] as const)('%s ± %s: %s', (measured, uncertainty, verdict) => {
    expect(judgeRecord([line('L', 1, 1.2)], { values: [value('L', measured, uncertainty)] }).verdict).toBe(
      verdict,
    );
  });
});

test('a line with one limit is judged by that alone', () => {
  expect(judgeRecord([line('L', 1, null)], { values: [value('L', 99)] }).verdict).toBe('pass');
  expect(judgeRecord([line('L', null, 1)], { values: [value('L', 99)] }).verdict).toBe('fail');
});

test('papers and tests go by their tick; a line left out fails; the worst line decides', () => {
  const lines = [line('L', 1, 1.2), line('D', null, null)];
  const judged = judgeRecord(lines, { values: [value('L', 1.1), value('D', null, 0, true)] });
  expect(judged.verdict).toBe('pass');
  expect(judgeRecord(lines, { values: [value('L', 1.1), value('D', null, 0, false)] }).verdict).toBe('fail');
  expect(judgeRecord(lines, { values: [value('L', 1.1)] }).verdict).toBe('fail');
  expect(judgeRecord(lines, { values: [value('L', 1.2, 0.01), value('D', null, 0, true)] }).verdict).toBe(
    'pass-with-remark',
  );
});
