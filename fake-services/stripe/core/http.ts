import type { IncomingMessage, ServerResponse } from 'node:http';

const MAX_BODY = 1024 * 1024;

export class BodyTooLarge extends Error {}

export async function readBody(request: IncomingMessage): Promise<string> {
  const chunks: Buffer[] = [];
  let size = 0;
  for await (const chunk of request) {
    const bytes = chunk as Buffer;
    size += bytes.length;
    if (size > MAX_BODY) throw new BodyTooLarge();
    chunks.push(bytes);
  }
  return Buffer.concat(chunks).toString('utf8');
}

export function sendText(
  response: ServerResponse,
  status: number,
  body: string,
  type: string,
  headers: Record<string, string> = {},
): void {
  if (response.destroyed) return;
  response.writeHead(status, { 'content-type': type, 'content-length': Buffer.byteLength(body), ...headers });
  response.end(body);
}

export function sendJson(
  response: ServerResponse,
  status: number,
  body: string,
  headers: Record<string, string> = {},
): void {
  sendText(response, status, body, 'application/json', headers);
}

/** Announces the whole answer, sends half of it and cuts the line. */
export function sendTorn(
  response: ServerResponse,
  status: number,
  body: string,
  headers: Record<string, string>,
): void {
  response.writeHead(status, {
    'content-type': 'application/json',
    'content-length': Buffer.byteLength(body),
    ...headers,
  });
  response.write(body.slice(0, Math.floor(body.length / 2)), () => response.destroy());
}
