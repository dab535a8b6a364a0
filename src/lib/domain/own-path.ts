/**
 * A path of our own to go on to, or the fallback. Whole addresses, `//host` and `/\host` (which browsers
 * read as another host) are refused, and so are control characters.
 */
export function ownPath(to: string | null | undefined, fallback: string): string {
  if (!to || !/^\/(?![/\\])/.test(to)) return fallback;
  for (const character of to) {
    const code = character.codePointAt(0) ?? 0;
    if (code < 0x20 || code === 0x7f || character === '\\') return fallback;
  }
  return to;
}
