import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { startObjectStore, type RunningObjectStore } from '../../fake-services/s3/server.ts';
import type { Actor } from '../../src/lib/domain/actor.ts';
import type { FilePurpose } from '../../src/lib/domain/files.ts';
import { createObjectStore, type ObjectStore } from '../../src/lib/server/adapters/object-store.ts';
import type { Database } from '../../src/lib/server/db/index.ts';
import { finishUpload, startUpload } from '../../src/lib/server/files/index.ts';

export interface TestStore {
  store: ObjectStore;
  front: RunningObjectStore;
  close(): Promise<void>;
}

/** The stand-in of the object store with its strict front on a free port, and an adapter that talks to it. */
export async function testStore(): Promise<TestStore> {
  const dataDir = mkdtempSync(path.join(tmpdir(), 'coilyard-objects-'));
  const credentials = {
    accessKeyId: 'TESTKEY',
    secretAccessKey: 'a-secret-for-this-test-only',
    region: 'eu-central-1',
  };
  const front = await startObjectStore({
    port: 0,
    dataDir,
    credentials,
    buckets: ['coilyard-test'],
    corsOrigins: ['http://localhost:3000'],
  });
  const store = createObjectStore({
    endpoint: front.url,
    publicEndpoint: front.url,
    bucket: 'coilyard-test',
    ...credentials,
  });
  return {
    store,
    front,
    async close() {
      store.close();
      await front.close();
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
}

/** The smallest PDF that is one: header, one empty page, cross-reference table, end mark. */
export function aPdf(note = ''): Uint8Array<ArrayBuffer> {
  const objects = [
    '<< /Type /Catalog /Pages 2 0 R >>',
    '<< /Type /Pages /Kids [3 0 R] /Count 1 >>',
    '<< /Type /Page /Parent 2 0 R /MediaBox [0 0 200 200] >>',
  ];
  let text = `%PDF-1.4\n% ${note}\n`;
  const offsets = objects.map((body, index) => {
    const offset = text.length;
    text += `${index + 1} 0 obj\n${body}\nendobj\n`;
    return offset;
  });
  const xref = text.length;
  text += `xref\n0 ${objects.length + 1}\n0000000000 65535 f \n`;
  for (const offset of offsets) text += `${String(offset).padStart(10, '0')} 00000 n \n`;
  text += `trailer\n<< /Size ${objects.length + 1} /Root 1 0 R >>\nstartxref\n${xref}\n%%EOF\n`;
  return new TextEncoder().encode(text);
}

/** Uploads through the signed slot as a browser would, and finishes; returns the id of the clean file. */
export async function anUploadedFile(
  db: Database,
  store: ObjectStore,
  actor: Actor,
  input: { companyId: string; purpose: FilePurpose; name?: string; bytes?: Uint8Array<ArrayBuffer> },
): Promise<string> {
  const bytes = input.bytes ?? aPdf();
  const slot = await startUpload(
    db,
    actor,
    {
      companyId: input.companyId,
      purpose: input.purpose,
      name: input.name ?? 'paper.pdf',
      size: bytes.byteLength,
    },
    store,
  );
  if (slot.mode !== 'single') throw new Error('this helper uploads small files');
  const sent = await fetch(slot.url, { method: 'PUT', headers: slot.headers, body: bytes });
  if (!sent.ok) throw new Error(`the store answered ${sent.status}: ${await sent.text()}`);
  const state = await finishUpload(db, actor, slot.fileId, { parts: [] }, store);
  if (state.state !== 'clean') throw new Error(`refused: ${state.refusedReason}`);
  return slot.fileId;
}
