import fc from 'fast-check';
import { expect, test } from 'vitest';
import { addDays, addWorkingDays, dateIn, endOfDate, formatInstant, hourMs } from './dates.ts';

test('a date ends at its midnight in the zone, also where clocks change', () => {
  // Offsets of the IANA time zone database: Berlin +1 in winter, +2 in summer; New York −5, −4; Kolkata +5:30.
  expect(new Date(endOfDate('Europe/Berlin', '2027-01-15')).toISOString()).toBe('2027-01-15T23:00:00.000Z');
  expect(new Date(endOfDate('Europe/Berlin', '2027-07-15')).toISOString()).toBe('2027-07-15T22:00:00.000Z');
  expect(new Date(endOfDate('America/New_York', '2027-01-15')).toISOString()).toBe(
    '2027-01-16T05:00:00.000Z',
  );
  expect(new Date(endOfDate('Asia/Kolkata', '2027-01-15')).toISOString()).toBe('2027-01-15T18:30:00.000Z');
  expect(new Date(endOfDate('UTC', '2026-12-31')).toISOString()).toBe('2027-01-01T00:00:00.000Z');
});

test('the day on which clocks change has 23 or 25 hours and still ends at midnight', () => {
  // European summer time of 2027: begins 28 March, ends 31 October (last Sundays, 01:00 UTC).
  const hours = (date: string) =>
    (endOfDate('Europe/Berlin', date) - endOfDate('Europe/Berlin', addDays(date, -1))) / hourMs;
  expect(hours('2027-03-28')).toBe(23);
  expect(hours('2027-10-31')).toBe(25);
  expect(hours('2027-06-01')).toBe(24);
});

test('the last millisecond of a date belongs to it and the next one does not', () => {
  const zones = [
    'UTC',
    'Europe/Berlin',
    'America/New_York',
    'Asia/Kolkata',
    'Pacific/Auckland',
    'America/St_Johns',
  ];
  fc.assert(
    fc.property(fc.integer({ min: 0, max: 3650 }), fc.constantFrom(...zones), (day, zone) => {
      const date = addDays('2026-01-01', day);
      const end = endOfDate(zone, date);
      expect(dateIn(zone, end - 1)).toBe(date);
      expect(dateIn(zone, end)).toBe(addDays(date, 1));
    }),
  );
});

test('days are added over month and leap year ends', () => {
  expect(addDays('2028-02-28', 1)).toBe('2028-02-29');
  expect(addDays('2027-02-28', 1)).toBe('2027-03-01');
  expect(addDays('2027-01-01', -1)).toBe('2026-12-31');
});

test('working days leave Saturday and Sunday out', () => {
  // 1 January 2027 is a Friday.
  expect(addWorkingDays('2027-01-01', 1)).toBe('2027-01-04');
  expect(addWorkingDays('2027-01-01', 5)).toBe('2027-01-08');
  expect(addWorkingDays('2027-01-02', 1)).toBe('2027-01-04');
  expect(addWorkingDays('2027-01-04', 0)).toBe('2027-01-04');
});

test('instants are shown in the zone of the person', () => {
  const at = Date.UTC(2027, 2, 12, 13, 5);
  expect(formatInstant(at, 'Europe/Berlin')).toBe('12 Mar 2027, 14:05');
  expect(formatInstant(at, 'America/New_York', false)).toBe('12 Mar 2027');
});
