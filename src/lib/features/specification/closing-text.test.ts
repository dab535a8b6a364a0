import { describe, expect, it } from 'vitest';
import { formatWindowEnd } from '../../domain/dates.ts';
import { closingText } from './closing-text.ts';

describe('the end of a day', () => {
  it('is told as 24:00 of that day, in its zone', () => {
    const at = Date.UTC(2026, 11, 15, 23, 0);
    expect(closingText(at, 'Europe/Berlin')).toMatch(/15 Dec 2026, 24:00$/);
    expect(formatWindowEnd(at, 'Europe/Berlin')).toBe('15 Dec 2026, 24:00');
  });

  it('is the plain time for readers in another zone', () => {
    const at = Date.UTC(2026, 11, 15, 23, 0);
    expect(closingText(at, 'America/New_York')).toMatch(/15 Dec 2026, 18:00$/);
    expect(formatWindowEnd(at, 'America/New_York')).toBe('15 Dec 2026, 18:00');
  });
});
