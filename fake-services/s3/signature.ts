/**
 * Checks AWS Signature Version 4 on a request by signing it again with the same signer the SDK uses, limited to
 * the headers the client says it signed. Reference: "Authenticating Requests (AWS Signature Version 4)", Amazon
 * S3 API reference.
 */
import { createHash, createHmac, timingSafeEqual } from 'node:crypto';
import { SignatureV4 } from '@smithy/signature-v4';

const MAX_PRESIGNED_SECONDS = 7 * 86_400;
const MAX_SKEW_MS = 15 * 60_000;

export interface Credentials {
  accessKeyId: string;
  secretAccessKey: string;
  region: string;
}

export interface SignedRequest {
  method: string;
  path: string;
  query: [string, string][];
  headers: Record<string, string>;
}

export class S3Refusal extends Error {
  readonly status: number;
  readonly code: string;

  constructor(status: number, code: string, message: string) {
    super(message);
    this.status = status;
    this.code = code;
  }
}

/** The hash that the signer asks for, on Node's own crypto. */
class Sha256 {
  private readonly hash: ReturnType<typeof createHash> | ReturnType<typeof createHmac>;

  constructor(secret?: string | ArrayBuffer | ArrayBufferView) {
    this.hash = secret === undefined ? createHash('sha256') : createHmac('sha256', toBytes(secret));
  }

  update(data: string | ArrayBuffer | ArrayBufferView): void {
    this.hash.update(toBytes(data));
  }

  digest(): Promise<Uint8Array> {
    return Promise.resolve(new Uint8Array(this.hash.digest()));
  }

  reset(): void {}
}

function toBytes(data: string | ArrayBuffer | ArrayBufferView): Buffer {
  if (typeof data === 'string') return Buffer.from(data);
  if (data instanceof ArrayBuffer) return Buffer.from(data);
  return Buffer.from(data.buffer, data.byteOffset, data.byteLength);
}

function parseDate(text: string): Date {
  const match = /^(\d{4})(\d{2})(\d{2})T(\d{2})(\d{2})(\d{2})Z$/.exec(text);
  if (match === null) throw new S3Refusal(403, 'AccessDenied', 'The request date is missing or malformed.');
  const [, year, month, day, hour, minute, second] = match;
  return new Date(Date.parse(`${year}-${month}-${day}T${hour}:${minute}:${second}Z`));
}

function same(a: string, b: string): boolean {
  const left = Buffer.from(a);
  const right = Buffer.from(b);
  return left.length === right.length && timingSafeEqual(left, right);
}

function assertScope(credential: string, known: Credentials, date: string): void {
  const [accessKeyId, day, region, service, end] = credential.split('/');
  if (accessKeyId !== known.accessKeyId) {
    throw new S3Refusal(403, 'InvalidAccessKeyId', 'The access key id does not exist in our records.');
  }
  if (region !== known.region || service !== 's3' || end !== 'aws4_request' || day !== date.slice(0, 8)) {
    throw new S3Refusal(
      400,
      'AuthorizationHeaderMalformed',
      'The credential scope does not fit region, service and date.',
    );
  }
}

function onlySigned(request: SignedRequest, signed: string[]): Record<string, string> {
  const headers: Record<string, string> = {};
  for (const name of signed) {
    const value = request.headers[name];
    if (value === undefined)
      throw new S3Refusal(403, 'SignatureDoesNotMatch', `The signed header ${name} is missing.`);
    headers[name] = value;
  }
  if (headers['host'] === undefined)
    throw new S3Refusal(403, 'AccessDenied', 'The host header has to be signed.');
  return headers;
}

function signer(known: Credentials): SignatureV4 {
  return new SignatureV4({
    service: 's3',
    region: known.region,
    credentials: { accessKeyId: known.accessKeyId, secretAccessKey: known.secretAccessKey },
    sha256: Sha256,
    uriEscapePath: false,
    applyChecksum: false,
  });
}

function queryBag(pairs: [string, string][]): Record<string, string | string[]> {
  const bag: Record<string, string | string[]> = {};
  for (const [name, value] of pairs) {
    const before = bag[name];
    bag[name] = before === undefined ? value : Array.isArray(before) ? [...before, value] : [before, value];
  }
  return bag;
}

const mismatch = () =>
  new S3Refusal(403, 'SignatureDoesNotMatch', 'The signature we calculated does not match the one provided.');

async function checkPresigned(request: SignedRequest, known: Credentials, now: Date): Promise<void> {
  const given = Object.fromEntries(request.query);
  const date = given['X-Amz-Date'] ?? '';
  const signingDate = parseDate(date);
  const expiresIn = Number(given['X-Amz-Expires']);
  if (!Number.isInteger(expiresIn) || expiresIn < 1 || expiresIn > MAX_PRESIGNED_SECONDS) {
    throw new S3Refusal(
      400,
      'AuthorizationQueryParametersError',
      'X-Amz-Expires must be between 1 second and a week.',
    );
  }
  assertScope(given['X-Amz-Credential'] ?? '', known, date);
  if (signingDate.getTime() - now.getTime() > MAX_SKEW_MS) {
    throw new S3Refusal(403, 'AccessDenied', 'Request is not valid yet');
  }
  if (now.getTime() > signingDate.getTime() + expiresIn * 1000) {
    throw new S3Refusal(403, 'AccessDenied', 'Request has expired');
  }
  const signed = (given['X-Amz-SignedHeaders'] ?? '').split(';');
  const own = new Set([
    'X-Amz-Signature',
    'X-Amz-SignedHeaders',
    'X-Amz-Algorithm',
    'X-Amz-Credential',
    'X-Amz-Date',
    'X-Amz-Expires',
  ]);
  const unhoistableHeaders = new Set(signed);
  const again = await signer(known).presign(
    {
      method: request.method,
      protocol: 'http:',
      hostname: 'ignored',
      path: request.path,
      query: queryBag(request.query.filter(([name]) => !own.has(name))),
      // Not a header of the request: tells the signer that the body is unsigned.
      headers: { ...onlySigned(request, signed), 'x-amz-content-sha256': 'UNSIGNED-PAYLOAD' },
    },
    {
      signingDate,
      expiresIn,
      signableHeaders: new Set(signed),
      unhoistableHeaders: unhoistableHeaders.add('x-amz-content-sha256'),
      ...(signed.includes('x-amz-content-sha256')
        ? {}
        : { unsignableHeaders: new Set(['x-amz-content-sha256']) }),
    },
  );
  if (!same(String(again.query?.['X-Amz-Signature']), given['X-Amz-Signature'] ?? '')) throw mismatch();
}

async function checkHeader(request: SignedRequest, known: Credentials, now: Date): Promise<void> {
  const header = request.headers['authorization'] ?? '';
  const match =
    /^AWS4-HMAC-SHA256 Credential=([^,]+),\s*SignedHeaders=([^,]+),\s*Signature=([0-9a-f]{64})$/.exec(header);
  if (match === null)
    throw new S3Refusal(400, 'AuthorizationHeaderMalformed', 'The authorization header is malformed.');
  const [, credential = '', signedList = '', signature = ''] = match;
  const date = request.headers['x-amz-date'] ?? '';
  const signingDate = parseDate(date);
  assertScope(credential, known, date);
  if (Math.abs(now.getTime() - signingDate.getTime()) > MAX_SKEW_MS) {
    throw new S3Refusal(
      403,
      'RequestTimeTooSkewed',
      'The difference between the request time and the current time is too large.',
    );
  }
  const signed = signedList.split(';');
  if (!signed.includes('x-amz-content-sha256') || !signed.includes('x-amz-date')) {
    throw new S3Refusal(403, 'AccessDenied', 'x-amz-date and x-amz-content-sha256 have to be signed.');
  }
  const again = await signer(known).sign(
    {
      method: request.method,
      protocol: 'http:',
      hostname: 'ignored',
      path: request.path,
      query: queryBag(request.query),
      headers: onlySigned(request, signed),
    },
    { signingDate, signableHeaders: new Set(signed) },
  );
  if (!same(/Signature=([0-9a-f]{64})$/.exec(again.headers['authorization'] ?? '')?.[1] ?? '', signature))
    throw mismatch();
}

/** Throws an S3Refusal unless the request carries one valid signature. */
export async function checkSignature(
  request: SignedRequest,
  known: Credentials,
  now = new Date(),
): Promise<void> {
  const presigned = request.query.some(([name]) => name === 'X-Amz-Signature');
  const headerSigned = request.headers['authorization'] !== undefined;
  if (presigned && headerSigned)
    throw new S3Refusal(400, 'InvalidArgument', 'Only one auth mechanism allowed.');
  if (presigned) await checkPresigned(request, known, now);
  else if (headerSigned) await checkHeader(request, known, now);
  else throw new S3Refusal(403, 'AccessDenied', 'Access Denied');
}
