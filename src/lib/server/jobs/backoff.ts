/**
 * Wait before the next try, ms: doubles from two seconds up to fifteen minutes, with a quarter of
 * jitter so that many failed items do not come back at once. `random` in [0, 1).
 */
export function backoffMs(attempts: number, random: number): number {
  const base = Math.min(900_000, 2_000 * 2 ** Math.min(attempts - 1, 20));
  return Math.round(base * (0.75 + 0.5 * random));
}
