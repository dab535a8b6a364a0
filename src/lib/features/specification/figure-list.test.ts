import { describe, expect, it } from 'vitest';
import { checkRequirement } from '$lib/induction/check/check-requirement.ts';
import { exampleRequirement } from '$lib/induction/check/examples.ts';
import { figureGroups, headlines, nearRows } from './figure-list.ts';

const nominal = checkRequirement(exampleRequirement(), { setting: 'preview', bands: false });

describe('figures for people', () => {
  it('show a preview without bands in three digits and claim no range', () => {
    const efficiency = headlines(nominal, 'metric').find((line) => line.name.startsWith('Efficiency'));
    expect(efficiency?.value).toMatch(/^\d{2}(\.\d)? %$/);
    expect(efficiency?.range).toBe('');
  });

  it('come in the reader’s units', () => {
    const flow = (unitSet: 'metric' | 'inch') =>
      headlines(nominal, unitSet).find((line) => line.name === 'Water flow')?.value;
    expect(flow('metric')).toMatch(/ L\/min$/);
    expect(flow('inch')).toMatch(/ US gal\/min$/);
  });

  it('leave no group empty and keep the fitted and advised rows among the near ones', () => {
    for (const group of figureGroups(nominal, 'metric')) expect(group.lines.length).toBeGreaterThan(0);
    const near = nearRows(nominal.ladder);
    expect(near.length).toBeLessThan(nominal.ladder.length);
    expect(near.some((row) => row.fitted)).toBe(true);
    expect(near.some((row) => row.advised)).toBe(true);
  });
});
