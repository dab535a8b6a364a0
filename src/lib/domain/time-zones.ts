/** True for a zone that this engine can compute with (IANA names, their links, and UTC). */
export function isTimeZone(zone: string): boolean {
  if (!/^[A-Za-z0-9_+\-/]{1,64}$/.test(zone)) return false;
  try {
    new Intl.DateTimeFormat('en', { timeZone: zone });
    return true;
  } catch {
    return false;
  }
}

/** Zones to choose from, UTC first. Engines differ in their lists: make it on the server. */
export function timeZoneOptions(): { value: string; label: string }[] {
  const zones = ['UTC', ...Intl.supportedValuesOf('timeZone').filter((zone) => zone !== 'UTC')];
  return zones.map((value) => ({ value, label: value.replaceAll('_', ' ') }));
}
