import { createHash, randomBytes } from 'node:crypto';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { startObjectStore, type RunningObjectStore } from '../../fake-services/s3/server.ts';
import {
  createObjectStore,
  ObjectStoreError,
  PART_SIZE_BYTES,
  type ObjectStore,
} from '../../src/lib/server/adapters/object-store.ts';

const credentials = {
  region: 'eu-central-1',
  accessKeyId: 'TESTKEY',
  secretAccessKey: 'test-secret-of-the-store',
};
const origin = 'http://localhost:3000';

let directory: string;
let running: RunningObjectStore;
let store: ObjectStore;

beforeAll(async () => {
  directory = await mkdtemp(path.join(tmpdir(), 'coilyard-objects-'));
  running = await startObjectStore({
    port: 0,
    dataDir: directory,
    buckets: ['coilyard'],
    corsOrigins: [origin],
    credentials,
  });
  store = createObjectStore({
    ...credentials,
    endpoint: running.url,
    publicEndpoint: running.url,
    bucket: 'coilyard',
  });
});

afterAll(async () => {
  store.close();
  await running.close();
  await rm(directory, { recursive: true, force: true });
});

const text = 'Ø 28 mm, four turns';
const slotFor = (key: string, sizeBytes: number, contentType = 'text/csv') =>
  store.presignPut({ key, contentType, sizeBytes });

async function errorCode(response: Response): Promise<string> {
  return `${String(response.status)} ${/<Code>(\w+)<\/Code>/.exec(await response.text())?.[1] ?? ''}`;
}

describe('a signed upload slot', () => {
  it('takes the body it was signed for, and the store knows its size, type and hash', async () => {
    const body = Buffer.from(text);
    const slot = await slotFor('acme/2026/a', body.length);
    const response = await fetch(slot.url, { method: slot.method, headers: slot.headers, body });
    expect(response.status).toBe(200);
    expect(response.headers.get('etag')).toMatch(/^"[0-9a-f]{32}"$/);
    expect(await store.head('acme/2026/a')).toMatchObject({
      sizeBytes: body.length,
      contentType: 'text/csv',
    });
    const seen = await store.inspect('acme/2026/a');
    expect(seen.sha256).toBe(createHash('sha256').update(body).digest('hex'));
    expect(Buffer.from(seen.firstBytes).toString()).toBe(text);
  });

  it('refuses a body of another length', async () => {
    const slot = await slotFor('acme/2026/b', 5);
    const response = await fetch(slot.url, {
      method: 'PUT',
      headers: slot.headers,
      body: 'longer than five',
    });
    expect(await errorCode(response)).toBe('403 SignatureDoesNotMatch');
    expect(await store.head('acme/2026/b')).toBeUndefined();
  });

  it('refuses another content type', async () => {
    const slot = await slotFor('acme/2026/c', 5);
    const response = await fetch(slot.url, {
      method: 'PUT',
      headers: { 'content-type': 'text/html' },
      body: '12345',
    });
    expect(await errorCode(response)).toBe('403 SignatureDoesNotMatch');
  });

  it('refuses another key, another verb and a changed expiry', async () => {
    const slot = await slotFor('acme/2026/d', 5);
    const otherKey = slot.url.replace('/d?', '/e?');
    const longer = slot.url.replace('X-Amz-Expires=300', 'X-Amz-Expires=3000');
    expect(
      await errorCode(await fetch(otherKey, { method: 'PUT', headers: slot.headers, body: '12345' })),
    ).toBe('403 SignatureDoesNotMatch');
    expect(
      await errorCode(await fetch(longer, { method: 'PUT', headers: slot.headers, body: '12345' })),
    ).toBe('403 SignatureDoesNotMatch');
    expect(await errorCode(await fetch(slot.url, { method: 'DELETE', headers: slot.headers }))).toMatch(
      /^403/,
    );
  });

  it('is signed for at most five minutes and 16 MB', async () => {
    await expect(
      store.presignPut({ key: 'k', contentType: 'text/csv', sizeBytes: 1, expiresInSeconds: 301 }),
    ).rejects.toThrow(RangeError);
    await expect(slotFor('k', 16 * 1024 * 1024 + 1)).rejects.toThrow(RangeError);
  });

  it('lapses', async () => {
    const slot = await store.presignPut({
      key: 'acme/2026/late',
      contentType: 'text/csv',
      sizeBytes: 5,
      expiresInSeconds: 1,
    });
    await new Promise((resolve) => setTimeout(resolve, 2100));
    const response = await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: '12345' });
    expect(response.status).toBe(403);
    expect(await response.text()).toContain('Request has expired');
  });

  it('is refused when its secret was another', async () => {
    const stranger = createObjectStore({
      ...credentials,
      secretAccessKey: 'some-other-secret',
      endpoint: running.url,
      publicEndpoint: running.url,
      bucket: 'coilyard',
    });
    const slot = await stranger.presignPut({ key: 'acme/2026/f', contentType: 'text/csv', sizeBytes: 5 });
    expect(
      await errorCode(await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: '12345' })),
    ).toBe('403 SignatureDoesNotMatch');
    await expect(stranger.head('acme/2026/a')).rejects.toThrow(ObjectStoreError);
    stranger.close();
  });

  it('takes nothing unsigned, in either direction', async () => {
    const bare = `${running.url}/coilyard/acme/2026/a`;
    expect(await errorCode(await fetch(bare))).toBe('403 AccessDenied');
    expect(await errorCode(await fetch(bare, { method: 'PUT', body: 'x' }))).toBe('403 AccessDenied');
  });
});

describe('pages of the application', () => {
  it('may call the store and read ETag; others may not', async () => {
    const ask = (from: string) =>
      fetch(`${running.url}/coilyard/x`, {
        method: 'OPTIONS',
        headers: {
          origin: from,
          'access-control-request-method': 'PUT',
          'access-control-request-headers': 'content-type',
        },
      });
    const ours = await ask(origin);
    expect(ours.status).toBe(204);
    expect(ours.headers.get('access-control-allow-origin')).toBe(origin);
    expect(ours.headers.get('access-control-expose-headers')).toBe('ETag');
    const theirs = await ask('http://elsewhere.example');
    expect(theirs.status).toBe(403);
    expect(theirs.headers.get('access-control-allow-origin')).toBeNull();
  });
});

describe('an upload in parts', () => {
  it('puts parts together in order of their numbers and gives what was sent', async () => {
    const key = 'acme/2026/large';
    const first = randomBytes(PART_SIZE_BYTES);
    const last = randomBytes(1234);
    const uploadId = await store.createMultipart({ key, contentType: 'application/pdf' });
    const parts: { partNumber: number; etag: string }[] = [];
    for (const [partNumber, body] of [
      [2, last],
      [1, first],
    ] as const) {
      const slot = await store.presignPart({ key, uploadId, partNumber, sizeBytes: body.length });
      const response = await fetch(slot.url, { method: 'PUT', body: new Uint8Array(body) });
      expect(response.status).toBe(200);
      parts.push({ partNumber, etag: response.headers.get('etag') ?? '' });
    }
    await store.completeMultipart({ key, uploadId, parts });
    const seen = await store.inspect(key);
    expect(seen.sizeBytes).toBe(first.length + last.length);
    expect(seen.sha256).toBe(createHash('sha256').update(first).update(last).digest('hex'));
  });

  it('refuses a part of another length and can be given up', async () => {
    const key = 'acme/2026/given-up';
    const uploadId = await store.createMultipart({ key, contentType: 'application/pdf' });
    const slot = await store.presignPart({ key, uploadId, partNumber: 1, sizeBytes: 10 });
    expect(await errorCode(await fetch(slot.url, { method: 'PUT', body: 'short' }))).toBe(
      '403 SignatureDoesNotMatch',
    );
    await store.abortMultipart({ key, uploadId });
    expect(await store.head(key)).toBeUndefined();
  });
});

describe('a download link', () => {
  it('names the file as an attachment and lives a minute at most', async () => {
    const body = Buffer.from(text);
    await store.put({ key: 'acme/2026/paper', contentType: 'text/csv', body });
    const url = await store.presignGet({
      key: 'acme/2026/paper',
      fileName: 'Łódź "coil"\r\n.csv',
      contentType: 'text/csv',
    });
    const response = await fetch(url);
    expect(response.status).toBe(200);
    expect(await response.text()).toBe(text);
    expect(response.headers.get('content-disposition')).toBe(
      `attachment; filename="__d_ _coil_.csv"; filename*=UTF-8''%C5%81%C3%B3d%C5%BA%20%22coil%22.csv`,
    );
    await expect(
      store.presignGet({
        key: 'acme/2026/paper',
        fileName: 'x',
        contentType: 'text/csv',
        expiresInSeconds: 61,
      }),
    ).rejects.toThrow(RangeError);
  });
});

describe('the store itself', () => {
  it('reads a range, deletes, and says when there is nothing', async () => {
    await store.put({ key: 'acme/2026/short', contentType: 'text/csv', body: Buffer.from('0123456789') });
    let part = '';
    for await (const chunk of await store.getStream('acme/2026/short', { start: 2, end: 4 }))
      part += String(chunk);
    expect(part).toBe('234');
    await store.remove('acme/2026/short');
    expect(await store.head('acme/2026/short')).toBeUndefined();
    await expect(store.getStream('acme/2026/short')).rejects.toMatchObject({ kind: 'missing' });
  });

  it('copies an object under another key, with the type it is given', async () => {
    await store.put({ key: 'acme/2026/original', contentType: 'text/csv', body: Buffer.from('copied') });
    await store.copy({ from: 'acme/2026/original', to: 'acme/2026/copy', contentType: 'application/pdf' });
    expect(await store.head('acme/2026/copy')).toMatchObject({
      sizeBytes: 6,
      contentType: 'application/pdf',
    });
    expect(await store.head('acme/2026/original')).toMatchObject({ contentType: 'text/csv' });
  });

  it('is tried again when it is in trouble, and reported when that does not help', async () => {
    running.failNext(1);
    await store.put({ key: 'acme/2026/retry', contentType: 'text/csv', body: Buffer.from('x') });
    expect(await store.head('acme/2026/retry')).toMatchObject({ sizeBytes: 1 });
    running.failNext(20);
    await expect(store.inspect('acme/2026/retry')).rejects.toMatchObject({ kind: 'unavailable' });
    running.failNext(0);
  });

  it('refuses keys that could be paths', async () => {
    await expect(slotFor('../etc/passwd', 1)).rejects.toThrow();
    await expect(slotFor('a b', 1)).rejects.toThrow();
  });
});
