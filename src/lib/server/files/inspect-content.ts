import { createHash } from 'node:crypto';
import type { FileEnds } from './content-checks.ts';

export const headBytes = 64 * 1024;
export const tailBytes = 4 * 1024;

export interface Inspection extends FileEnds {
  sha256: string;
}

function hasControl(bytes: Uint8Array): boolean {
  return bytes.some((byte) => byte < 32 && byte !== 9 && byte !== 10 && byte !== 12 && byte !== 13);
}

/**
 * Reads a file once, in pieces: its size, SHA-256, both ends, and whether it is text. Stops with what it
 * has when more than `maxBytes` come; the size then says so.
 */
export async function inspectContent(
  chunks: AsyncIterable<Uint8Array>,
  maxBytes: number,
): Promise<Inspection> {
  const hash = createHash('sha256');
  const utf8 = new TextDecoder('utf-8', { fatal: true });
  const head: Uint8Array[] = [];
  let headSize = 0;
  let tail: Uint8Array = new Uint8Array();
  let size = 0;
  let isText = true;
  let isUtf8 = true;
  for await (const chunk of chunks) {
    size += chunk.byteLength;
    hash.update(chunk);
    if (headSize < headBytes) {
      const part = chunk.subarray(0, headBytes - headSize);
      head.push(Uint8Array.from(part));
      headSize += part.byteLength;
    }
    tail =
      chunk.byteLength >= tailBytes
        ? Uint8Array.from(chunk.subarray(-tailBytes))
        : Uint8Array.from(Buffer.concat([tail, chunk]).subarray(-tailBytes));
    isText &&= !hasControl(chunk);
    if (isText && isUtf8) isUtf8 = decodes(utf8, chunk);
    if (size > maxBytes) break;
  }
  if (isUtf8) isUtf8 = decodes(utf8);
  return {
    head: Uint8Array.from(Buffer.concat(head)),
    tail,
    size,
    isText,
    isUtf8: isText && isUtf8,
    sha256: hash.digest('hex'),
  };
}

function decodes(decoder: TextDecoder, chunk?: Uint8Array): boolean {
  try {
    decoder.decode(chunk, { stream: chunk !== undefined });
    return true;
  } catch {
    return false;
  }
}
