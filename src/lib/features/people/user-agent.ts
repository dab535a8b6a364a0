/** A browser and its system in words, as far as its own description tells; good enough to know one's devices. */
export function deviceWords(userAgent: string | null): string {
  if (!userAgent) return 'Unknown device';
  const browser = /Edg\//.exec(userAgent)
    ? 'Edge'
    : /OPR\//.exec(userAgent)
      ? 'Opera'
      : /Firefox\//.exec(userAgent)
        ? 'Firefox'
        : /Chrom(e|ium)\//.exec(userAgent)
          ? 'Chrome'
          : /Safari\//.exec(userAgent)
            ? 'Safari'
            : 'Other program';
  const system = /Android/.exec(userAgent)
    ? 'Android'
    : /iPhone|iPad/.exec(userAgent)
      ? 'iOS'
      : /Windows/.exec(userAgent)
        ? 'Windows'
        : /Mac OS X/.exec(userAgent)
          ? 'macOS'
          : /Linux/.exec(userAgent)
            ? 'Linux'
            : '';
  return system ? `${browser} on ${system}` : browser;
}
