import { expect, test } from 'vitest';
import { isTimeZone, timeZoneOptions } from './time-zones.ts';

test('zones of the database are known, other text is not', () => {
  for (const zone of ['UTC', 'Europe/Berlin', 'America/Argentina/Buenos_Aires', 'Asia/Kolkata']) {
    expect(isTimeZone(zone), zone).toBe(true);
  }
  for (const zone of ['', 'Berlin', 'Europe/Nowhere', '../etc', 'Europe/Berlin\n', 'x'.repeat(80)]) {
    expect(isTimeZone(zone), zone).toBe(false);
  }
  expect(timeZoneOptions().map((o) => o.value)).toContain('Europe/London');
});
