import { fileTypeFromBuffer } from 'file-type';
import type { FileKind } from '../../domain/files.ts';

/** What is kept of a file while it is read once: its two ends, its size, and whether it is plain text. */
export interface FileEnds {
  /** The first bytes, up to 64 kB. */
  head: Uint8Array;
  /** The last bytes, up to 4 kB. */
  tail: Uint8Array;
  size: number;
  /** No NUL byte and no control character beside tab, line feed, form feed and carriage return. */
  isText: boolean;
  isUtf8: boolean;
}

const mimeOf: Partial<Record<FileKind, string>> = {
  pdf: 'application/pdf',
  png: 'image/png',
  jpeg: 'image/jpeg',
  webp: 'image/webp',
};

const latin = new TextDecoder('latin1');

/** Markup that a browser might render if it ever met it as a page. */
function looksLikeMarkup(text: string): boolean {
  return (
    /^\s*</.test(text.replace(/^\ufeff/, '')) || /<(?:!doctype|html|script|svg|iframe|\?xml)\b/i.test(text)
  );
}

/**
 * DXF: group code 0 and SECTION on two lines, comments (group code 999) before it allowed, EOF at the
 * end; or the binary form by its sentinel. Autodesk, DXF Reference, "ASCII DXF Files" and "Binary DXF
 * Files" (from memory).
 */
function isDxf({ head, tail, isText }: FileEnds): boolean {
  const start = latin.decode(head);
  if (start.startsWith('AutoCAD Binary DXF\r\n\x1a\0')) return true;
  if (!isText) return false;
  const body = start.replace(/^\ufeff|^ï»¿/, '');
  const opens = /^(?:\s*999\r?\n[^\r\n]*\r?\n)*\s*0\r?\n\s*SECTION\s*\r?\n/.test(body);
  return opens && /(?:^|\n)\s*0\r?\n\s*EOF\s*$/.test(latin.decode(tail));
}

/** STEP: ISO 10303-21 clear text, from `ISO-10303-21;` to `END-ISO-10303-21;`, with a HEADER section. */
function isStep({ head, tail, isText }: FileEnds): boolean {
  const start = latin.decode(head);
  return (
    isText &&
    /^\s*ISO-10303-21\s*;/.test(start) &&
    /\bHEADER\s*;/.test(start) &&
    /END-ISO-10303-21\s*;\s*$/.test(latin.decode(tail))
  );
}

/**
 * STL: binary has an 80-byte header, a little-endian count and 50 bytes per facet, so its size is known;
 * ASCII runs from `solid` to `endsolid` with facets. (Common practice; there is no formal standard.)
 */
function isStl({ head, tail, size, isText }: FileEnds): boolean {
  if (isText) {
    const start = latin.decode(head);
    return (
      /^\s*solid\b/.test(start) &&
      /\bfacet\s+normal\b/.test(start) &&
      /endsolid\b[^\n]*\s*$/.test(latin.decode(tail))
    );
  }
  if (head.length < 84) return false;
  const facets = new DataView(head.buffer, head.byteOffset, head.byteLength).getUint32(80, true);
  return facets > 0 && size === 84 + 50 * facets;
}

/** CSV (RFC 4180 in spirit): UTF-8 text, no markup, the same number of separators in its first lines. */
function isCsv(ends: FileEnds): boolean {
  const { head, size, isText, isUtf8 } = ends;
  if (!isText || !isUtf8 || isDxf(ends) || isStep(ends) || isStl(ends)) return false;
  const text = new TextDecoder().decode(head);
  if (looksLikeMarkup(text)) return false;
  // Quoted cells may hold separators and line breaks; they are cut out before counting.
  const lines = text
    .replace(/"(?:[^"]|"")*"/g, '')
    .split(/\r?\n/)
    .slice(0, size > head.length ? -1 : undefined)
    .filter((line) => line.trim() !== '')
    .slice(0, 20);
  if (lines.length === 0) return false;
  return [',', ';', '\t'].some((separator) => {
    const counts = lines.map((line) => line.split(separator).length);
    return (counts[0] ?? 0) > 1 && counts.every((count) => count === counts[0]);
  });
}

/** A PDF begins with its header in the first kilobyte and ends with its mark (ISO 32000-1, 7.5.2 and 7.5.5). */
function isWholePdf({ head, tail }: FileEnds): boolean {
  return latin.decode(head.subarray(0, 1024)).includes('%PDF-') && latin.decode(tail).includes('%%EOF');
}

/** True when the content is of the kind that the name says. */
export async function contentIs(kind: FileKind, ends: FileEnds): Promise<boolean> {
  switch (kind) {
    case 'dxf':
      return isDxf(ends);
    case 'step':
      return isStep(ends);
    case 'stl':
      return isStl(ends);
    case 'csv':
      return isCsv(ends);
    default: {
      const found = await fileTypeFromBuffer(ends.head);
      return found?.mime === mimeOf[kind] && (kind !== 'pdf' || isWholePdf(ends));
    }
  }
}
