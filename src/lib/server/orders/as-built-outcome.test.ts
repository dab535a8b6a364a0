import { expect, test } from 'vitest';
import type { AsBuiltBody } from '../../domain/as-built.ts';
import { checkRequirement } from '../../induction/check/check-requirement.ts';
import { exampleRequirement } from '../../induction/check/examples.ts';
import { outcomeOf } from './as-built-outcome.ts';

function bodyWith(lineId: string, inductance: number): AsBuiltBody {
  return {
    values: [
      {
        lineId,
        value: inductance,
        uncertainty: 0.01 * inductance,
        passed: null,
        instrument: 'LCR meter',
        calibrationDate: '2026-03-01',
        note: '',
      },
    ],
    testFrequency: null,
    temperatureC: 20,
    leadState: '',
    compensation: 'open and short',
    measuredOn: '2026-11-20',
    note: '',
  };
}

test('a larger measured inductance tunes lower at whatever setting is advised, and says how that was reached', () => {
  const requirement = exampleRequirement();
  const check = checkRequirement(requirement, { setting: 'default' });
  const line = requirement.acceptance.find((one) => one.kind === 'inductance');
  if (!line) throw new Error('the example has an inductance line');
  const predicted = check.bareAtTest?.inductance.value ?? check.bare?.inductance.value ?? 0;
  const near = outcomeOf(requirement, check, bodyWith(line.id, predicted));
  const larger = outcomeOf(requirement, check, bodyWith(line.id, predicted * 1.3));
  expect(requirement.machine.transformer?.bankSide).toBe('primary');
  // Seen from the bank the coil's inductance is n²·L, so (2πf)²·C·n² is 1/L whatever row is advised.
  const inverse = (outcome: typeof near) => {
    const row = check.ladder.find((one) => one.label === outcome.advised?.label);
    if (!outcome.advised || !row) throw new Error('a row is advised');
    return (2 * Math.PI * outcome.advised.frequencyHot) ** 2 * outcome.advised.capacitance * row.ratio ** 2;
  };
  expect(inverse(larger)).toBeLessThan(inverse(near));
  expect(larger.explanation).toContain('inductance difference');
  expect(larger.comparisons.find((one) => one.unit === 'H')?.measured).toBeCloseTo(predicted * 1.3, 12);
}, 60_000);
