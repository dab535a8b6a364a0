import { describe, expect, it } from 'vitest';
import { renderFinding } from './render-finding.ts';

const finding = {
  template: 'The gap of {gap} at {hot} leaves {share:%} for {turns} turns, {away:m} away; {unknown} stays.',
  values: {
    gap: { value: 0.002, unit: 'm' },
    hot: { value: 850, unit: 'C' },
    share: { value: 0.1234, unit: '1' },
    turns: { value: 5, unit: '1' },
    away: { value: 0.8, unit: 'm' },
  },
} as const;

describe('findings as sentences', () => {
  it('fills in metric units', () => {
    expect(renderFinding(finding, 'metric')).toBe(
      'The gap of 2 mm at 850 °C leaves 12.3 % for 5 turns, 0.8 m away; {unknown} stays.',
    );
  });

  it('fills in inch units', () => {
    expect(renderFinding(finding, 'inch')).toBe(
      'The gap of 0.0787 in at 1562 °F leaves 12.3 % for 5 turns, 2.62 ft away; {unknown} stays.',
    );
  });
});
