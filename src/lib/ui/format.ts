/**
 * Dates and money as text, written out here rather than by Intl's own styles, because the server's and
 * the browser's language data differ in places and the page must not change when it comes to life.
 * Only the numeric parts of a zone are taken from Intl.
 */

const months = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'];
const weekdays = ['Sun', 'Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat'];
const formatters = new Map<string, Intl.DateTimeFormat>();

function formatter(zone: string): Intl.DateTimeFormat {
  let made = formatters.get(zone);
  if (!made) {
    const options = {
      year: 'numeric',
      month: '2-digit',
      day: '2-digit',
      hour: '2-digit',
      minute: '2-digit',
      hourCycle: 'h23',
    } as const;
    try {
      made = new Intl.DateTimeFormat('en-GB', { ...options, timeZone: zone });
    } catch {
      // A zone this engine does not know is shown in UTC, and says so.
      made = new Intl.DateTimeFormat('en-GB', { ...options, timeZone: 'UTC' });
    }
    formatters.set(zone, made);
  }
  return made;
}

export interface ZonedParts {
  year: number;
  month: number;
  day: number;
  hour: number;
  minute: number;
  /** The zone the parts are in: the one asked for, or UTC where that is not known. */
  zone: string;
}

/** The wall-clock parts of an instant (milliseconds UTC) in an IANA zone. */
export function zonedParts(ms: number, zone: string): ZonedParts {
  const made = formatter(zone);
  const parts = new Map(made.formatToParts(ms).map((part) => [part.type, Number(part.value)]));
  return {
    year: parts.get('year') ?? 0,
    month: parts.get('month') ?? 1,
    day: parts.get('day') ?? 1,
    hour: parts.get('hour') ?? 0,
    minute: parts.get('minute') ?? 0,
    zone: made.resolvedOptions().timeZone === 'UTC' ? 'UTC' : zone,
  };
}

const two = (value: number) => String(value).padStart(2, '0');

/** "Tue 3 Feb 2026" */
export function dayText(ms: number, zone: string): string {
  const { year, month, day } = zonedParts(ms, zone);
  const weekday = weekdays[new Date(Date.UTC(year, month - 1, day)).getUTCDay()];
  return `${weekday} ${day} ${months[month - 1]} ${year}`;
}

/** "14:05" on the 24-hour clock. */
export function timeText(ms: number, zone: string): string {
  const { hour, minute } = zonedParts(ms, zone);
  return `${two(hour)}:${two(minute)}`;
}

/** "Tue 3 Feb 2026, 14:05" */
export function instantText(ms: number, zone: string): string {
  return `${dayText(ms, zone)}, ${timeText(ms, zone)}`;
}

/** A calendar day (YYYY-MM-DD) as "3 Feb 2026"; anything else comes back as it is. */
export function calendarText(day: string): string {
  const found = /^(\d{4})-(\d{2})-(\d{2})$/.exec(day);
  const month = found ? months[Number(found[2]) - 1] : undefined;
  return found && month ? `${Number(found[3])} ${month} ${found[1]}` : day;
}

const minorDigits: Record<string, number> = { EUR: 2, USD: 2, GBP: 2 };

/** Minor units as "EUR 1,234.50"; a no-break space keeps code and figure together. */
export function moneyText(amount: number, currency: string): string {
  const digits = minorDigits[currency] ?? 2;
  const sign = amount < 0 ? '−' : '';
  const text = String(Math.abs(Math.trunc(amount))).padStart(digits + 1, '0');
  const whole = text.slice(0, text.length - digits).replace(/\B(?=(\d{3})+$)/g, ',');
  return `${sign}${currency}\u00a0${whole}.${text.slice(text.length - digits)}`;
}
