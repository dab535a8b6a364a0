import { expect, it } from 'vitest';
import { exampleRequirement } from './examples.ts';
import { resolveAcceptance } from './resolve-acceptance.ts';
import type { AcceptanceLine } from './types.ts';

const line = exampleRequirement().acceptance[0] as AcceptanceLine;
const proposed: AcceptanceLine = {
  ...line,
  nominal: 7e-7,
  low: 6.8e-7,
  high: 7.2e-7,
  note: 'from the range',
};

it('gives a computed line without figures those of the proposal', () => {
  expect(resolveAcceptance([line], [proposed])[0]).toMatchObject({
    id: line.id,
    nominal: 7e-7,
    low: 6.8e-7,
    high: 7.2e-7,
    testFrequency: 20e3,
  });
});

it('leaves the buyer’s own values, and lines nobody can compute, as they are', () => {
  const own: AcceptanceLine = { ...line, basis: 'buyer', low: 6e-7 };
  const paper: AcceptanceLine = { ...line, id: 'paper', kind: 'document' };
  expect(resolveAcceptance([own, paper], [proposed])).toEqual([own, paper]);
});
