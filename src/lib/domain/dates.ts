/** Instants are integer milliseconds UTC; a day of a window is 24 hours from its start. */
export const hourMs = 3_600_000;
export const dayMs = 24 * hourMs;

/** The calendar date (YYYY-MM-DD) of an instant in an IANA zone. */
export function dateIn(zone: string, at: number): string {
  const parts = new Intl.DateTimeFormat('en-CA', {
    timeZone: zone,
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
  }).formatToParts(at);
  const get = (type: string) => parts.find((part) => part.type === type)?.value ?? '';
  return `${get('year')}-${get('month')}-${get('day')}`;
}

/** Offset of a zone from UTC at an instant, ms. */
function offsetAt(zone: string, at: number): number {
  const parts = new Intl.DateTimeFormat('en-US', {
    timeZone: zone,
    hourCycle: 'h23',
    year: 'numeric',
    month: 'numeric',
    day: 'numeric',
    hour: 'numeric',
    minute: 'numeric',
    second: 'numeric',
  }).formatToParts(at);
  const get = (type: string) => Number(parts.find((part) => part.type === type)?.value);
  return (
    Date.UTC(get('year'), get('month') - 1, get('day'), get('hour'), get('minute'), get('second')) -
    Math.floor(at / 1000) * 1000
  );
}

/** The instant at which a date ends (24:00) in a zone. */
export function endOfDate(zone: string, date: string): number {
  const midnightUtc = Date.parse(`${date}T00:00:00Z`) + dayMs;
  let at = midnightUtc - offsetAt(zone, midnightUtc);
  at = midnightUtc - offsetAt(zone, at);
  return at;
}

/** Adds calendar days to a date. */
export function addDays(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * dayMs).toISOString().slice(0, 10);
}

/** Adds working days (Monday to Friday; public holidays are not known and not claimed). */
export function addWorkingDays(date: string, days: number): string {
  let current = date;
  for (let left = days; left > 0;) {
    current = addDays(current, 1);
    const weekday = new Date(`${current}T00:00:00Z`).getUTCDay();
    if (weekday !== 0 && weekday !== 6) left -= 1;
  }
  return current;
}

/** The end of a window: midnight is told as 24:00 of the day that ends, as people say it. */
export function formatWindowEnd(at: number, zone: string): string {
  const text = formatInstant(at, zone);
  return text.endsWith('00:00') ? `${formatInstant(at - 60_000, zone, false)}, 24:00` : text;
}

/** `12 Mar 2027, 14:05` in the zone; the same text on server and browser. */
export function formatInstant(at: number, zone: string, withTime = true): string {
  return new Intl.DateTimeFormat('en-GB', {
    timeZone: zone,
    day: 'numeric',
    month: 'short',
    year: 'numeric',
    ...(withTime ? { hour: '2-digit', minute: '2-digit', hourCycle: 'h23' } : {}),
  }).format(at);
}

/**
 * An instant at which something ends: midnight is told as 24:00 of the day that ends, `24:00 on 12 Mar 2027`,
 * any other time as `12 Mar 2027, 14:05`.
 */
export function formatDeadline(at: number, zone: string): string {
  const text = formatInstant(at, zone);
  return text.endsWith('00:00') ? `24:00 on ${formatInstant(at - 1, zone, false)}` : text;
}
