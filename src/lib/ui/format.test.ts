import { describe, expect, test } from 'vitest';
import { calendarText, dayText, instantText, moneyText, zonedParts } from './format.ts';

describe('an instant in a zone', () => {
  test('moves with the zone, over midnight too', () => {
    const ms = Date.UTC(2026, 1, 3, 23, 30);
    expect(instantText(ms, 'UTC')).toBe('Tue 3 Feb 2026, 23:30');
    expect(instantText(ms, 'Europe/Berlin')).toBe('Wed 4 Feb 2026, 00:30');
    expect(instantText(ms, 'America/New_York')).toBe('Tue 3 Feb 2026, 18:30');
  });

  test('follows daylight saving: Berlin is one hour ahead in winter, two in summer', () => {
    expect(zonedParts(Date.UTC(2026, 0, 15, 12), 'Europe/Berlin').hour).toBe(13);
    expect(zonedParts(Date.UTC(2026, 6, 15, 12), 'Europe/Berlin').hour).toBe(14);
  });

  test('midnight is 00:00 of the new day', () => {
    expect(instantText(Date.UTC(2026, 8, 1), 'UTC')).toBe('Tue 1 Sep 2026, 00:00');
  });

  test('an unknown zone falls back to UTC and says so', () => {
    expect(zonedParts(0, 'Nowhere/Land').zone).toBe('UTC');
    expect(dayText(0, 'Nowhere/Land')).toBe('Thu 1 Jan 1970');
  });
});

test('a calendar day is written out; other text stays', () => {
  expect(calendarText('2026-02-03')).toBe('3 Feb 2026');
  expect(calendarText('soon')).toBe('soon');
  expect(calendarText('2026-13-01')).toBe('2026-13-01');
});

describe('money from minor units', () => {
  test.each([
    [0, 'EUR', 'EUR\u00a00.00'],
    [5, 'USD', 'USD\u00a00.05'],
    [123456789, 'EUR', 'EUR\u00a01,234,567.89'],
    [-250, 'GBP', '−GBP\u00a02.50'],
    [100000, 'EUR', 'EUR\u00a01,000.00'],
  ])('%i %s', (amount, currency, text) => {
    expect(moneyText(amount, currency)).toBe(text);
  });
});
