/**
 * The stand-in of the object store: s3rver keeps the objects, and this strict front stands before it, because
 * s3rver checks no V4 signature, serves anyone and knows no limits. The front checks signature, expiry, length
 * and payload hash, strips the credentials and forwards.
 */
import { createHash } from 'node:crypto';
import { createServer, request as httpRequest, type IncomingMessage, type ServerResponse } from 'node:http';
import { mkdirSync } from 'node:fs';
import { rm } from 'node:fs/promises';
import type { AddressInfo } from 'node:net';
import path from 'node:path';
import S3rver from 's3rver';
import { checkCompletedParts } from './parts.ts';
import { checkSignature, S3Refusal, type Credentials, type SignedRequest } from './signature.ts';

/** Bodies whose hash is signed are held in memory until it is checked; larger ones come presigned. */
const MAX_HELD_BODY = 64 * 1024 * 1024;
/** One PUT of S3 takes 5 GB; the stand-in of a product that allows 16 MB per PUT needs far less. */
const MAX_BODY = 128 * 1024 * 1024;

export interface ObjectStoreOptions {
  port: number;
  host?: string;
  dataDir: string;
  credentials: Credentials;
  buckets: string[];
  /** Origins whose pages may call. */
  corsOrigins: string[];
}

export interface RunningObjectStore {
  url: string;
  port: number;
  /** The next n calls answer 503, as a store in trouble does. */
  failNext: (count: number) => void;
  close: () => Promise<void>;
}

const CORS_METHODS = 'GET, HEAD, PUT';

function corsHeaders(request: IncomingMessage, allowed: string[]): Record<string, string> {
  const origin = request.headers.origin;
  if (origin === undefined || !(allowed.includes(origin) || allowed.includes('*'))) return {};
  return {
    'access-control-allow-origin': origin,
    'access-control-expose-headers': 'ETag',
    vary: 'Origin',
  };
}

function refuse(response: ServerResponse, refusal: S3Refusal, headers: Record<string, string>): void {
  if (response.headersSent || response.destroyed) return;
  const body = `<?xml version="1.0" encoding="UTF-8"?>\n<Error><Code>${refusal.code}</Code><Message>${refusal.message}</Message></Error>`;
  // What was not read of the body must not be taken for the next request.
  response.writeHead(refusal.status, {
    ...headers,
    'content-type': 'application/xml',
    'content-length': Buffer.byteLength(body),
    connection: 'close',
  });
  response.end(body);
}

function describe(request: IncomingMessage): SignedRequest {
  const url = new URL(request.url ?? '/', 'http://front');
  const headers: Record<string, string> = {};
  for (const [name, value] of Object.entries(request.headers)) {
    if (value !== undefined) headers[name] = Array.isArray(value) ? value.join(',') : value;
  }
  return { method: request.method ?? 'GET', path: url.pathname, query: [...url.searchParams], headers };
}

function assertLength(signed: SignedRequest): void {
  if (signed.method !== 'PUT') return;
  const length = Number(signed.headers['content-length']);
  if (signed.headers['transfer-encoding'] !== undefined || !Number.isInteger(length)) {
    throw new S3Refusal(411, 'MissingContentLength', 'You must provide the Content-Length HTTP header.');
  }
  if (length > MAX_BODY)
    throw new S3Refusal(400, 'EntityTooLarge', 'Your proposed upload exceeds the maximum allowed size.');
}

/** Reads a body whose hash was signed and compares; undefined when the body may be streamed as it comes. */
async function heldBody(request: IncomingMessage, signed: SignedRequest): Promise<Buffer | undefined> {
  const expected = signed.headers['x-amz-content-sha256'];
  if (expected === undefined || expected === 'UNSIGNED-PAYLOAD') return undefined;
  if (!/^[0-9a-f]{64}$/.test(expected)) {
    throw new S3Refusal(501, 'NotImplemented', 'Streaming signatures are not supported here.');
  }
  const chunks: Buffer[] = [];
  let size = 0;
  for await (const chunk of request) {
    size += (chunk as Buffer).length;
    if (size > MAX_HELD_BODY) throw new S3Refusal(400, 'EntityTooLarge', 'The signed body is too large.');
    chunks.push(chunk as Buffer);
  }
  const body = Buffer.concat(chunks);
  if (createHash('sha256').update(body).digest('hex') !== expected) {
    throw new S3Refusal(
      400,
      'XAmzContentSHA256Mismatch',
      'The provided x-amz-content-sha256 header does not match what was computed.',
    );
  }
  return body;
}

const OVERRIDES = [
  'content-type',
  'content-disposition',
  'content-language',
  'content-encoding',
  'cache-control',
  'expires',
];

function forwardTarget(signed: SignedRequest): {
  path: string;
  headers: Record<string, string>;
  overrides: Record<string, string>;
} {
  const query = new URLSearchParams();
  const overrides: Record<string, string> = {};
  for (const [name, value] of signed.query) {
    const override = OVERRIDES.find((header) => name === `response-${header}`);
    // s3rver refuses overrides on unsigned requests, and after this point all are: the front applies them.
    if (override !== undefined) overrides[override] = value;
    else if (!name.startsWith('X-Amz-') && name !== 'x-id') query.append(name, value);
  }
  const dropped = new Set([
    'authorization',
    'origin',
    'host',
    'connection',
    'x-amz-content-sha256',
    'x-amz-date',
    'x-amz-security-token',
  ]);
  const headers = Object.fromEntries(Object.entries(signed.headers).filter(([name]) => !dropped.has(name)));
  const search = query.toString();
  return { path: search === '' ? signed.path : `${signed.path}?${search}`, headers, overrides };
}

function forward(
  request: IncomingMessage,
  response: ServerResponse,
  signed: SignedRequest,
  body: Buffer | undefined,
  backPort: number,
  cors: Record<string, string>,
): void {
  const target = forwardTarget(signed);
  const onward = httpRequest(
    { host: '127.0.0.1', port: backPort, method: signed.method, path: target.path, headers: target.headers },
    (answer) => {
      const headers = Object.fromEntries(
        Object.entries(answer.headers).filter(([name]) => !name.startsWith('access-control-')),
      );
      const ok = (answer.statusCode ?? 500) < 300;
      response.writeHead(answer.statusCode ?? 502, { ...headers, ...(ok ? target.overrides : {}), ...cors });
      answer.pipe(response);
    },
  );
  onward.on('error', () =>
    refuse(response, new S3Refusal(503, 'ServiceUnavailable', 'The store is not reachable.'), cors),
  );
  // A client that breaks off leaves no half object behind.
  response.on('close', () => {
    if (!response.writableFinished) onward.destroy();
  });
  if (body !== undefined) onward.end(body);
  else request.pipe(onward);
}

async function startBack(options: ObjectStoreOptions): Promise<{ back: S3rver; port: number }> {
  mkdirSync(options.dataDir, { recursive: true });
  const back = new S3rver({
    port: 0,
    address: '127.0.0.1',
    directory: options.dataDir,
    silent: true,
    configureBuckets: options.buckets.map((name) => ({ name, configs: [] })),
  });
  const { port } = await back.run();
  return { back, port };
}

/** s3rver cannot give up an upload, so the front removes its parts. True when the request was that. */
async function abortUpload(
  signed: SignedRequest,
  dataDir: string,
  response: ServerResponse,
): Promise<boolean> {
  const uploadId = signed.query.find(([name]) => name === 'uploadId')?.[1];
  if (signed.method !== 'DELETE' || uploadId === undefined) return false;
  if (!/^[0-9a-f]{32}$/.test(uploadId))
    throw new S3Refusal(404, 'NoSuchUpload', 'The specified upload does not exist.');
  const bucket = decodeURIComponent(signed.path.split('/')[1] ?? '');
  if (!/^[a-z0-9][a-z0-9.-]{2,62}$/.test(bucket))
    throw new S3Refusal(404, 'NoSuchBucket', 'The bucket does not exist.');
  await rm(path.join(dataDir, bucket, '._S3rver_uploads', uploadId), { recursive: true, force: true });
  response.writeHead(204).end();
  return true;
}

/** Starts store and front; `port: 0` takes a free one. */
export async function startObjectStore(options: ObjectStoreOptions): Promise<RunningObjectStore> {
  const host = options.host ?? '127.0.0.1';
  const { back, port: backPort } = await startBack(options);
  let failures = 0;

  async function serve(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const cors = corsHeaders(request, options.corsOrigins);
    try {
      if (request.url === '/health') {
        response.writeHead(200, { 'content-type': 'application/json' }).end('{"ok":true}');
        return;
      }
      if (request.method === 'OPTIONS') {
        if (cors['access-control-allow-origin'] === undefined)
          throw new S3Refusal(403, 'AccessForbidden', 'CORSResponse: this origin is not allowed.');
        const asked = request.headers['access-control-request-headers'];
        response
          .writeHead(204, {
            ...cors,
            'access-control-allow-methods': CORS_METHODS,
            ...(asked === undefined ? {} : { 'access-control-allow-headers': asked }),
            'access-control-max-age': '600',
          })
          .end();
        return;
      }
      if (failures > 0) {
        failures -= 1;
        throw new S3Refusal(503, 'SlowDown', 'Please reduce your request rate.');
      }
      const signed = describe(request);
      assertLength(signed);
      await checkSignature(signed, options.credentials);
      const body = await heldBody(request, signed);
      await checkCompletedParts(signed, body, options.dataDir);
      if (await abortUpload(signed, options.dataDir, response)) return;
      forward(request, response, signed, body, backPort, cors);
    } catch (error) {
      refuse(
        response,
        error instanceof S3Refusal ? error : new S3Refusal(500, 'InternalError', String(error)),
        cors,
      );
    }
  }

  const server = createServer((request, response) => void serve(request, response));
  const port = await new Promise<number>((resolve, reject) => {
    server.once('error', reject);
    server.listen(options.port, host, () => resolve((server.address() as AddressInfo).port));
  });
  return {
    url: `http://${host}:${String(port)}`,
    port,
    failNext: (count) => {
      failures = count;
    },
    close: async () => {
      server.closeAllConnections();
      await new Promise((resolve) => server.close(resolve));
      await back.close();
    },
  };
}
