import { calendarText, instantText, zonedParts } from '$lib/ui/format.ts';

/** The end of a day said as people say it: "15 Dec 2026, 24:00" instead of the next day at 00:00. */
export function closingText(at: number, zone: string): string {
  const { hour, minute } = zonedParts(at, zone);
  if (hour !== 0 || minute !== 0) return instantText(at, zone);
  const { year, month, day } = zonedParts(at - 60_000, zone);
  const two = (value: number) => String(value).padStart(2, '0');
  return `${calendarText(`${year}-${two(month)}-${two(day)}`)}, 24:00`;
}
