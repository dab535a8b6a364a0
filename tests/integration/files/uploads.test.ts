import { createHash } from 'node:crypto';
import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { uploadPartBytes } from '../../../src/lib/domain/files.ts';
import { file } from '../../../src/lib/server/db/schema/files.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import {
  cancelUpload,
  clearUnfinishedUploads,
  fileLink,
  finishUpload,
  signUploadParts,
  startUpload,
  uploadState,
} from '../../../src/lib/server/files/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aPdf, testStore, type TestStore } from '../../support/files.ts';
import { aCompany, aMember } from '../../support/people.ts';

let objects: TestStore;
let t: TestDatabase;
let buyerId: string;
let engineer: Actor;

beforeAll(async () => {
  objects = await testStore();
});
afterAll(() => objects.close());

beforeEach(async () => {
  t = await testDatabase();
  buyerId = await aCompany(t.db, 'buyer');
  engineer = await aMember(t.db, buyerId, ['engineer']);
});
afterEach(() => t.close());

const rows = () => t.db.select().from(file);
const sketch = (name: string, size: number) => ({
  companyId: buyerId,
  purpose: 'request-sketch' as const,
  name,
  size,
});

async function send(name: string, bytes: Uint8Array<ArrayBuffer>) {
  const slot = await startUpload(t.db, engineer, sketch(name, bytes.byteLength), objects.store);
  if (slot.mode !== 'single') throw new Error('expected one slot');
  const answer = await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: bytes });
  return {
    slot,
    status: answer.status,
    finish: () => finishUpload(t.db, engineer, slot.fileId, { parts: [] }, objects.store),
  };
}

describe('one signed slot', () => {
  test('a PDF goes through, is hashed by the server, and can be fetched by a link under its name', async () => {
    const bytes = aPdf('a drawing');
    const { status, finish, slot } = await send('Spüle 3 (rev A).pdf', bytes);
    expect(status).toBe(200);
    const state = await finish();
    expect(state).toMatchObject({ state: 'clean', sha256: createHash('sha256').update(bytes).digest('hex') });

    const link = await fileLink(t.db, engineer, slot.fileId, objects.store);
    expect(Number(new URL(link.url).searchParams.get('X-Amz-Expires'))).toBeLessThanOrEqual(60);
    const fetched = await fetch(link.url);
    expect(fetched.headers.get('content-disposition')).toMatch(/^attachment; .*filename\*=UTF-8''Sp%C3%BCle/);
    expect(fetched.headers.get('content-type')).toBe('application/pdf');
    expect(new Uint8Array(await fetched.arrayBuffer())).toEqual(bytes);
  });

  test('the slot takes neither another length nor another type', async () => {
    const bytes = aPdf();
    const slot = await startUpload(t.db, engineer, sketch('a.pdf', bytes.byteLength), objects.store);
    if (slot.mode !== 'single') throw new Error('expected one slot');
    const longer = new Uint8Array([...bytes, 0x20]);
    const put = (body: Uint8Array<ArrayBuffer>, headers: Record<string, string>) =>
      fetch(slot.url, { method: 'PUT', headers, body });
    expect((await put(longer, slot.headers)).status).toBe(403);
    expect((await put(bytes, { 'content-type': 'text/html' })).status).toBe(403);
    expect((await put(bytes, slot.headers)).status).toBe(200);
  });

  test('an SVG that is called PNG is refused, deleted from the store, and nobody gets a link', async () => {
    const svg = new TextEncoder().encode('<svg xmlns="http://www.w3.org/2000/svg"><script>1</script></svg>');
    const { finish, slot } = await send('logo.png', svg);
    const state = await finish();
    expect(state.state).toBe('refused');
    expect(state.refusedReason).toContain('PNG');
    const [row] = await rows();
    expect(row?.storageKey).toBeNull();
    expect(await objects.store.head(row?.incomingKey ?? '')).toBeUndefined();
    await expect(fileLink(t.db, engineer, slot.fileId, objects.store)).rejects.toMatchObject({
      code: 'not-found',
    });
  });

  test('what is sent to the slot after verification changes nothing of what is served', async () => {
    const bytes = aPdf('first');
    const { slot, finish } = await send('a.pdf', bytes);
    await finish();
    const other = aPdf('third');
    expect(other.byteLength).toBe(bytes.byteLength);
    if (slot.mode !== 'single') throw new Error('expected one slot');
    await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: other });
    const link = await fileLink(t.db, engineer, slot.fileId, objects.store);
    expect(new Uint8Array(await (await fetch(link.url)).arrayBuffer())).toEqual(bytes);
  });

  test('two finishes at once agree, and one clean file is left', async () => {
    const { finish } = await send('a.pdf', aPdf());
    const [one, two] = await Promise.all([finish(), finish()]);
    expect(one).toEqual(two);
    expect(one.state).toBe('clean');
    const [row] = await rows();
    expect(await objects.store.head(row?.storageKey ?? '')).toBeDefined();
    expect(await t.db.select().from(auditEvent).where(eq(auditEvent.action, 'file.pass'))).toHaveLength(1);
  });

  test('finishing before anything arrived is told and can be done later', async () => {
    const bytes = aPdf();
    const slot = await startUpload(t.db, engineer, sketch('a.pdf', bytes.byteLength), objects.store);
    if (slot.mode !== 'single') throw new Error('expected one slot');
    const finish = () => finishUpload(t.db, engineer, slot.fileId, { parts: [] }, objects.store);
    await expect(finish()).rejects.toMatchObject({ code: 'state-conflict' });
    await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: bytes });
    expect((await finish()).state).toBe('clean');
  });

  test('a store in trouble is told as such and the upload can be finished afterwards', async () => {
    const { finish } = await send('a.pdf', aPdf());
    objects.front.failNext(20);
    await expect(finish()).rejects.toMatchObject({ code: 'storage-service' });
    objects.front.failNext(0);
    expect((await finish()).state).toBe('clean');
  });
});

describe('what is not taken', () => {
  test.each([
    ['page.html', 10, 'type-refused'],
    ['drawing.svg', 10, 'type-refused'],
    ['drawing.pdf.exe', 10, 'type-refused'],
    ['no-extension', 10, 'type-refused'],
    [`${'x'.repeat(160)}.pdf`, 10, 'type-refused'],
    ['empty.pdf', 0, 'invalid-input'],
    ['huge.pdf', 600 * 1024 * 1024, 'too-large'],
  ])('%s of %i bytes: %s', async (name, size, code) => {
    await expect(startUpload(t.db, engineer, sketch(name, size), objects.store)).rejects.toMatchObject({
      code,
    });
    expect(await rows()).toHaveLength(0);
  });

  test('folders and marks that turn the reading direction leave the name', async () => {
    const name = '..\\..\\secret/\u202Efdp.exe.pdf';
    const slot = await startUpload(t.db, engineer, sketch(name, 10), objects.store);
    const [row] = await rows();
    expect(row).toMatchObject({ id: slot.fileId, name: 'fdp.exe.pdf' });
    expect(row?.incomingKey).not.toContain('fdp');
  });

  test('an unconfirmed e-mail address uploads nothing', async () => {
    const fresh = await aMember(t.db, buyerId, ['engineer'], { emailVerified: false });
    await expect(startUpload(t.db, fresh, sketch('a.pdf', 10), objects.store)).rejects.toMatchObject({
      code: 'email-not-verified',
    });
    expect(await rows()).toHaveLength(0);
  });
});

describe('parts', () => {
  const bytes = (() => {
    const head = aPdf('large');
    const all = new Uint8Array(uploadPartBytes * 2 + 1_000_000);
    all.set(head);
    all.set(new TextEncoder().encode('\n%%EOF\n'), all.length - 7);
    return all;
  })();
  const partOf = (number: number) => bytes.subarray((number - 1) * uploadPartBytes, number * uploadPartBytes);

  async function begin() {
    const slot = await startUpload(t.db, engineer, sketch('large.pdf', bytes.byteLength), objects.store);
    if (slot.mode !== 'parts') throw new Error('expected parts');
    return slot;
  }

  async function sendParts(fileId: string, numbers: number[]) {
    const { items } = await signUploadParts(t.db, engineer, fileId, { numbers }, objects.store);
    return Promise.all(
      items.map(async ({ number, url, headers }) => {
        const answer = await fetch(url, { method: 'PUT', headers, body: partOf(number) });
        expect(answer.status).toBe(200);
        return { number, etag: answer.headers.get('etag') ?? '' };
      }),
    );
  }

  test('a file above 16 MB goes in parts, a missing one is named and sent later', async () => {
    const slot = await begin();
    expect(slot.partCount).toBe(3);
    const first = await sendParts(slot.fileId, [1, 3]);
    await expect(
      finishUpload(t.db, engineer, slot.fileId, { parts: first }, objects.store),
    ).rejects.toMatchObject({ code: 'state-conflict', data: { missing: [2] } });
    const second = await sendParts(slot.fileId, [2]);
    const state = await finishUpload(
      t.db,
      engineer,
      slot.fileId,
      { parts: [...first, ...second] },
      objects.store,
    );
    expect(state).toMatchObject({ state: 'clean', sha256: createHash('sha256').update(bytes).digest('hex') });
  });

  test('a part that is claimed and was never sent does not finish the upload', async () => {
    const slot = await begin();
    const parts = await sendParts(slot.fileId, [1, 3]);
    const claimed = { number: 2, etag: `"${'0'.repeat(32)}"` };
    await expect(
      finishUpload(t.db, engineer, slot.fileId, { parts: [...parts, claimed] }, objects.store),
    ).rejects.toMatchObject({ code: 'state-conflict' });
    expect((await uploadState(t.db, engineer, slot.fileId)).state).toBe('pending');
    const all = [...parts, ...(await sendParts(slot.fileId, [2]))];
    const state = await finishUpload(t.db, engineer, slot.fileId, { parts: all }, objects.store);
    expect(state.state).toBe('clean');
  });

  test('a part whose ETag is not the one of the store does not finish the upload', async () => {
    const slot = await begin();
    const parts = await sendParts(slot.fileId, [1, 2, 3]);
    const forged = parts.map((part) => (part.number === 2 ? { ...part, etag: `"${'0'.repeat(32)}"` } : part));
    await expect(
      finishUpload(t.db, engineer, slot.fileId, { parts: forged }, objects.store),
    ).rejects.toMatchObject({ code: 'state-conflict' });
    expect((await finishUpload(t.db, engineer, slot.fileId, { parts }, objects.store)).state).toBe('clean');
  });

  test('no slots for parts that the file does not have, nor for a file in one slot', async () => {
    const slot = await begin();
    await expect(
      signUploadParts(t.db, engineer, slot.fileId, { numbers: [4] }, objects.store),
    ).rejects.toMatchObject({ code: 'invalid-input' });
    const single = await startUpload(t.db, engineer, sketch('a.pdf', 100), objects.store);
    await expect(
      signUploadParts(t.db, engineer, single.fileId, { numbers: [1] }, objects.store),
    ).rejects.toMatchObject({ code: 'state-conflict' });
  });

  test('a cancelled upload leaves no parts and can not be finished', async () => {
    const slot = await begin();
    const parts = await sendParts(slot.fileId, [1, 2, 3]);
    await cancelUpload(t.db, engineer, slot.fileId, objects.store);
    const state = await finishUpload(t.db, engineer, slot.fileId, { parts }, objects.store);
    expect(state).toMatchObject({ state: 'refused', refusedReason: 'The upload was cancelled.' });
  });
});

test('an upload that was never finished is cleared after a day, a finished one stays', async () => {
  const { finish } = await send('kept.pdf', aPdf());
  await finish();
  const { slot } = await send('left.pdf', aPdf());
  const signal = new AbortController().signal;
  expect(await clearUnfinishedUploads(t.db, signal, objects.store)).toBe(0);
  await t.db.update(file).set({ expiresAt: Date.now() - 1 });
  expect(await clearUnfinishedUploads(t.db, signal, objects.store)).toBe(1);
  const left = (await rows()).find((row) => row.id === slot.fileId);
  expect(left?.state).toBe('refused');
  expect(await objects.store.head(left?.incomingKey ?? '')).toBeUndefined();
});
