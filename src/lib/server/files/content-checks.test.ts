import { describe, expect, test } from 'vitest';
import type { FileKind } from '../../domain/files.ts';
import { contentIs } from './content-checks.ts';
import { headBytes, inspectContent, tailBytes } from './inspect-content.ts';

const bytes = (text: string) => new TextEncoder().encode(text);

async function* inPieces(all: Uint8Array, size: number): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < all.length; at += size) yield await Promise.resolve(all.subarray(at, at + size));
}

async function isKind(kind: FileKind, all: Uint8Array, piece = 1000): Promise<boolean> {
  return contentIs(kind, await inspectContent(inPieces(all, piece), all.length));
}

// Signatures: PNG (ISO/IEC 15948, 5.2) with an IHDR chunk, JPEG (ITU-T T.81, SOI + APP0), WebP (RFC 9649, 2.4).
const png = Uint8Array.from([
  0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a, 0, 0, 0, 13, 0x49, 0x48, 0x44, 0x52, 0, 0, 0, 1, 0, 0, 0, 1,
  8, 6, 0, 0, 0, 0x1f, 0x15, 0xc4, 0x89, 0, 0, 0, 10, 0x49, 0x44, 0x41, 0x54, 0x78, 0x9c, 0x63, 0, 1, 0, 0, 5,
  0, 1,
]);
const jpeg = Uint8Array.from([
  0xff, 0xd8, 0xff, 0xe0, 0, 16, 0x4a, 0x46, 0x49, 0x46, 0, 1, 1, 0, 0, 1, 0, 1, 0, 0,
]);
const webp = Uint8Array.from([
  ...bytes('RIFF'),
  26,
  0,
  0,
  0,
  ...bytes('WEBPVP8L'),
  14,
  0,
  0,
  0,
  0x2f,
  ...Array<number>(13).fill(0),
]);
const pdf = bytes('%PDF-1.7\n1 0 obj\n<<>>\nendobj\nstartxref\n0\n%%EOF\n');
const dxf = bytes('  0\r\nSECTION\r\n  2\r\nENTITIES\r\n  0\r\nENDSEC\r\n  0\r\nEOF\r\n');
const step = bytes(
  "ISO-10303-21;\nHEADER;\nFILE_SCHEMA(('AP214'));\nENDSEC;\nDATA;\nENDSEC;\nEND-ISO-10303-21;\n",
);
const asciiStl = bytes(
  'solid nest\n facet normal 0 0 1\n outer loop\n vertex 0 0 0\n vertex 1 0 0\n vertex 0 1 0\n endloop\n endfacet\nendsolid nest\n',
);
const binaryStl = (() => {
  const all = new Uint8Array(84 + 50 * 2);
  new DataView(all.buffer).setUint32(80, 2, true);
  return all;
})();
const csv = bytes('frequency_Hz,L_H\r\n10000,1.2e-6\r\n20000,"1,1e-6"\r\n');

const good: [FileKind, Uint8Array][] = [
  ['pdf', pdf],
  ['png', png],
  ['jpeg', jpeg],
  ['webp', webp],
  ['dxf', dxf],
  ['step', step],
  ['stl', asciiStl],
  ['stl', binaryStl],
  ['csv', csv],
];

describe('content of a kind', () => {
  test.each(good)('%s is recognised, however it comes in pieces', async (kind, all) => {
    for (const piece of [7, all.length]) expect(await isKind(kind, all, piece)).toBe(true);
  });

  test.each(good.map(([kind]) => kind))('nothing else passes as %s', async (kind) => {
    const others = good.filter(([other]) => other !== kind).map(([, all]) => all);
    const page = bytes('<!doctype html><html><script>1</script></html>');
    const svg = bytes('<?xml version="1.0"?><svg xmlns="http://www.w3.org/2000/svg"/>');
    for (const all of [...others, page, svg, bytes('MZ\0\0'), bytes(' ')]) {
      expect(await isKind(kind, all)).toBe(false);
    }
  });

  test('a PDF that was cut off is refused', async () => {
    expect(await isKind('pdf', pdf.subarray(0, pdf.length - 8))).toBe(false);
  });

  test('a binary STL whose count does not fit its size is refused', async () => {
    expect(await isKind('stl', Uint8Array.from([...binaryStl, 0]))).toBe(false);
  });

  test('a DXF with comments before its first section and the binary sentinel are both DXF', async () => {
    expect(await isKind('dxf', Uint8Array.from([...bytes('999\nmade by a test\n'), ...dxf]))).toBe(true);
    expect(await isKind('dxf', bytes('AutoCAD Binary DXF\r\n\x1a\0\0\0'))).toBe(true);
  });

  test('a table with markup in a cell, ragged lines, one column or bytes that are not UTF-8 is no CSV', async () => {
    expect(await isKind('csv', bytes('a,b\n<script>1</script>,2\n'))).toBe(false);
    expect(await isKind('csv', bytes('a,b\n1,2,3\n'))).toBe(false);
    expect(await isKind('csv', bytes('only\nwords\n'))).toBe(false);
    expect(await isKind('csv', Uint8Array.from([...bytes('a,b\n1,'), 0xff, 0x0a]))).toBe(false);
  });
});

describe('reading once', () => {
  test('size, both ends and SHA-256 are those of the whole, whatever the pieces', async () => {
    const all = Uint8Array.from({ length: headBytes + 3 * tailBytes + 17 }, (_, index) => 32 + (index % 90));
    for (const piece of [1000, 65_537, all.length]) {
      const found = await inspectContent(inPieces(all, piece), all.length);
      expect(found.size).toBe(all.length);
      expect(found.head).toEqual(all.slice(0, headBytes));
      expect(found.tail).toEqual(all.slice(-tailBytes));
      expect(found.isText).toBe(true);
    }
  });

  test('SHA-256 of "abc" is that of FIPS 180-4', async () => {
    // NIST, FIPS 180-4 example values, one-block message.
    const found = await inspectContent(inPieces(bytes('abc'), 1), 3);
    expect(found.sha256).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
  });

  test('more than was announced is noticed and not read to its end', async () => {
    let given = 0;
    async function* endless() {
      for (;;) {
        given += 1;
        yield await Promise.resolve(new Uint8Array(1000));
      }
    }
    expect((await inspectContent(endless(), 5_000)).size).toBe(6_000);
    expect(given).toBe(6);
  });
});
