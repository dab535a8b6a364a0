import { createHash } from 'node:crypto';
import { Readable } from 'node:stream';
import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CopyObjectCommand,
  CreateMultipartUploadCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadObjectCommand,
  PutObjectCommand,
  S3Client,
  S3ServiceException,
  UploadPartCommand,
} from '@aws-sdk/client-s3';
import { getSignedUrl } from '@aws-sdk/s3-request-presigner';
import { z } from 'zod';

export interface ObjectStoreConfig {
  /** Where this process reaches the store. */
  endpoint: string;
  /** Where browsers reach it: signed into the links they get. */
  publicEndpoint: string;
  bucket: string;
  region: string;
  accessKeyId: string;
  secretAccessKey: string;
}

/** Largest body of one signed PUT; above it the upload goes in parts. */
export const SINGLE_PUT_LIMIT_BYTES = 16 * 1024 * 1024;
export const PART_SIZE_BYTES = 8 * 1024 * 1024;
/** S3 numbers parts from 1 to 10,000. */
const MAX_PARTS = 10_000;
const MAX_UPLOAD_SECONDS = 300;
const MAX_DOWNLOAD_SECONDS = 60;

export interface SignedSlot {
  method: 'PUT';
  url: string;
  /** The browser has to send exactly these. Content-Length is signed too; browsers set it by themselves. */
  headers: Record<string, string>;
  expiresInSeconds: number;
}

export interface ObjectHead {
  sizeBytes: number;
  contentType: string | undefined;
  etag: string;
}

export type ObjectStoreErrorKind = 'missing' | 'unavailable' | 'refused';

/** A call to the store failed. `unavailable` may be tried again. */
export class ObjectStoreError extends Error {
  readonly kind: ObjectStoreErrorKind;

  constructor(kind: ObjectStoreErrorKind, message: string, cause?: unknown) {
    super(message, { cause });
    this.name = 'ObjectStoreError';
    this.kind = kind;
  }
}

const headSchema = z.object({
  ContentLength: z.number().int().min(0),
  ContentType: z.string().optional(),
  ETag: z.string(),
});
const uploadSchema = z.object({ UploadId: z.string().min(1) });
const bodySchema = z.instanceof(Readable);
const keySchema = z.string().regex(/^[A-Za-z0-9][A-Za-z0-9/_.-]{0,1000}$/, 'is no object key');

function toError(error: unknown): Error {
  if (!(error instanceof S3ServiceException)) {
    return new ObjectStoreError('unavailable', error instanceof Error ? error.message : String(error), error);
  }
  const status = error.$metadata.httpStatusCode ?? 0;
  if (status === 404) return new ObjectStoreError('missing', `${error.name}: ${error.message}`, error);
  const kind = status === 0 || status >= 500 || status === 429 ? 'unavailable' : 'refused';
  return new ObjectStoreError(kind, `${error.name}: ${error.message}`, error);
}

async function call<T>(work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (error) {
    throw toError(error);
  }
}

function client(config: ObjectStoreConfig, endpoint: string): S3Client {
  return new S3Client({
    endpoint,
    region: config.region,
    forcePathStyle: true,
    credentials: { accessKeyId: config.accessKeyId, secretAccessKey: config.secretAccessKey },
    // Several S3 servers store the SDK's default checksummed chunks with their framing.
    requestChecksumCalculation: 'WHEN_REQUIRED',
    responseChecksumValidation: 'WHEN_REQUIRED',
    maxAttempts: 3,
  });
}

function assertSeconds(seconds: number, limit: number): void {
  if (!Number.isInteger(seconds) || seconds < 1 || seconds > limit) {
    throw new RangeError(`a signed link lives 1 to ${String(limit)} seconds, not ${String(seconds)}`);
  }
}

function assertSize(sizeBytes: number, limit: number): void {
  if (!Number.isSafeInteger(sizeBytes) || sizeBytes < 1 || sizeBytes > limit) {
    throw new RangeError(`the size must be 1 to ${String(limit)} bytes, not ${String(sizeBytes)}`);
  }
}

/** RFC 6266: a plain fallback and the exact name in UTF-8. */
function attachment(fileName: string): string {
  const safe = fileName.replace(/[\p{Cc}\p{Cf}]/gu, '').slice(0, 200) || 'file';
  const plain = safe.replace(/[^\x20-\x7e]/g, '_').replace(/["\\%/]/g, '_');
  const exact = encodeURIComponent(safe).replace(
    /['()*]/g,
    (char) => `%${char.charCodeAt(0).toString(16).toUpperCase()}`,
  );
  return `attachment; filename="${plain}"; filename*=UTF-8''${exact}`;
}

interface Connection {
  bucket: string;
  server: S3Client;
  /** Links carry the host they were signed for, so browsers' links need a client of their own. */
  signer: S3Client;
  at: (key: string) => { Bucket: string; Key: string };
}

export type ObjectStore = ReturnType<typeof createObjectStore>;

/** Objects in an S3 bucket. Keys are made by the server; names that people gave are never part of them. */
export function createObjectStore(config: ObjectStoreConfig) {
  const server = client(config, config.endpoint);
  const signer = client(config, config.publicEndpoint);
  const connection: Connection = {
    bucket: config.bucket,
    server,
    signer,
    at: (key) => ({ Bucket: config.bucket, Key: keySchema.parse(key) }),
  };
  return {
    ...uploadCalls(connection),
    ...objectCalls(connection),
    close: () => {
      server.destroy();
      signer.destroy();
    },
  };
}

/** What browsers upload, through signed slots. */
function uploadCalls({ server, signer, at }: Connection) {
  /** A slot for one PUT of exactly this size and type, up to 16 MB, at most five minutes. */
  async function presignPut(given: {
    key: string;
    contentType: string;
    sizeBytes: number;
    expiresInSeconds?: number;
  }): Promise<SignedSlot> {
    const expiresInSeconds = given.expiresInSeconds ?? MAX_UPLOAD_SECONDS;
    assertSeconds(expiresInSeconds, MAX_UPLOAD_SECONDS);
    assertSize(given.sizeBytes, SINGLE_PUT_LIMIT_BYTES);
    const command = new PutObjectCommand({
      ...at(given.key),
      ContentType: given.contentType,
      ContentLength: given.sizeBytes,
    });
    const url = await getSignedUrl(signer, command, {
      expiresIn: expiresInSeconds,
      signableHeaders: new Set(['content-type', 'content-length', 'host']),
    });
    return { method: 'PUT', url, headers: { 'content-type': given.contentType }, expiresInSeconds };
  }

  async function createMultipart(given: { key: string; contentType: string }): Promise<string> {
    const command = new CreateMultipartUploadCommand({ ...at(given.key), ContentType: given.contentType });
    return call(async () => uploadSchema.parse(await server.send(command)).UploadId);
  }

  /** A slot for one part of an upload; every part but the last has PART_SIZE_BYTES. */
  async function presignPart(given: {
    key: string;
    uploadId: string;
    partNumber: number;
    sizeBytes: number;
    expiresInSeconds?: number;
  }): Promise<SignedSlot> {
    const expiresInSeconds = given.expiresInSeconds ?? MAX_UPLOAD_SECONDS;
    assertSeconds(expiresInSeconds, MAX_UPLOAD_SECONDS);
    assertSize(given.sizeBytes, PART_SIZE_BYTES);
    assertSize(given.partNumber, MAX_PARTS);
    const command = new UploadPartCommand({
      ...at(given.key),
      UploadId: given.uploadId,
      PartNumber: given.partNumber,
      ContentLength: given.sizeBytes,
    });
    const url = await getSignedUrl(signer, command, {
      expiresIn: expiresInSeconds,
      signableHeaders: new Set(['content-length', 'host']),
    });
    return { method: 'PUT', url, headers: {}, expiresInSeconds };
  }

  /** Puts the parts together in the order of their numbers. */
  async function completeMultipart(given: {
    key: string;
    uploadId: string;
    parts: { partNumber: number; etag: string }[];
  }): Promise<void> {
    const Parts = [...given.parts]
      .sort((a, b) => a.partNumber - b.partNumber)
      .map((part) => ({ PartNumber: part.partNumber, ETag: part.etag }));
    const command = new CompleteMultipartUploadCommand({
      ...at(given.key),
      UploadId: given.uploadId,
      MultipartUpload: { Parts },
    });
    await call(() => server.send(command));
  }

  /** Gives up an upload; parts already sent are thrown away. */
  async function abortMultipart(given: { key: string; uploadId: string }): Promise<void> {
    await call(() =>
      server.send(new AbortMultipartUploadCommand({ ...at(given.key), UploadId: given.uploadId })),
    );
  }

  return { presignPut, createMultipart, presignPart, completeMultipart, abortMultipart };
}

/** What the server itself reads, writes and hands out. */
function objectCalls({ bucket, server, signer, at }: Connection) {
  /** Writes an object the server made itself (papers, drawings it computed). */
  async function put(given: { key: string; contentType: string; body: Uint8Array }): Promise<void> {
    const command = new PutObjectCommand({
      ...at(given.key),
      ContentType: given.contentType,
      Body: given.body,
      ContentLength: given.body.byteLength,
    });
    await call(() => server.send(command));
  }

  /** Undefined when there is no such object. */
  async function head(key: string): Promise<ObjectHead | undefined> {
    try {
      const found = await call(async () =>
        headSchema.parse(await server.send(new HeadObjectCommand(at(key)))),
      );
      return { sizeBytes: found.ContentLength, contentType: found.ContentType, etag: found.ETag };
    } catch (error) {
      if (error instanceof ObjectStoreError && error.kind === 'missing') return undefined;
      throw error;
    }
  }

  async function getStream(key: string, range?: { start: number; end: number }): Promise<Readable> {
    const command = new GetObjectCommand({
      ...at(key),
      ...(range === undefined ? {} : { Range: `bytes=${String(range.start)}-${String(range.end)}` }),
    });
    return call(async () => bodySchema.parse((await server.send(command)).Body));
  }

  /** SHA-256 (hex) and size of what is stored, read in one pass, with its first bytes for the type check. */
  async function inspect(
    key: string,
  ): Promise<{ sha256: string; sizeBytes: number; firstBytes: Uint8Array }> {
    const stream = await getStream(key);
    const hash = createHash('sha256');
    const first: Buffer[] = [];
    let sizeBytes = 0;
    for await (const chunk of stream) {
      const bytes = chunk as Buffer;
      if (sizeBytes < 4100) first.push(bytes.subarray(0, 4100 - sizeBytes));
      sizeBytes += bytes.length;
      hash.update(bytes);
    }
    return { sha256: hash.digest('hex'), sizeBytes, firstBytes: Buffer.concat(first) };
  }

  /** A download link of at most a minute; browsers save the file under its name and never show it in our origin. */
  async function presignGet(given: {
    key: string;
    fileName: string;
    contentType: string;
    expiresInSeconds?: number;
  }): Promise<string> {
    const expiresIn = given.expiresInSeconds ?? MAX_DOWNLOAD_SECONDS;
    assertSeconds(expiresIn, MAX_DOWNLOAD_SECONDS);
    const command = new GetObjectCommand({
      ...at(given.key),
      ResponseContentDisposition: attachment(given.fileName),
      ResponseContentType: given.contentType,
    });
    return getSignedUrl(signer, command, { expiresIn });
  }

  /** A copy inside the store, of what is at `from` when the store gets to it. */
  async function copy(given: { from: string; to: string; contentType: string }): Promise<void> {
    const command = new CopyObjectCommand({
      ...at(given.to),
      CopySource: `${bucket}/${keySchema.parse(given.from)}`,
      MetadataDirective: 'REPLACE',
      ContentType: given.contentType,
    });
    await call(() => server.send(command));
  }

  /** Deleting what is not there is no error. */
  async function remove(key: string): Promise<void> {
    await call(() => server.send(new DeleteObjectCommand(at(key))));
  }

  return { put, head, getStream, inspect, presignGet, copy, remove };
}
