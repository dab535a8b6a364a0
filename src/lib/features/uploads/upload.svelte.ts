import { kindsText, uploadMaxBytes, uploadPartBytes, type FilePurpose } from '../../domain/files.ts';
import type { UploadSlot, UploadState } from '../../schemas/api/files.ts';
import { dropNote, noteKey, readNote, writeNote, type ResumeNote } from './resume-notes.ts';
import { sendBytes, uploadApi, UploadProblem } from './transport.ts';

export type ItemState = 'waiting' | 'sending' | 'checking' | 'done' | 'failed' | 'cancelled';

const triesPerPart = 3;
/** Slots are signed for five minutes, so only a few are asked for ahead. */
const slotsAhead = 2;

function isCancel(problem: unknown): boolean {
  return problem instanceof DOMException && problem.name === 'AbortError';
}

/** One file on its way: start, send, have it checked; stops and goes on where it stopped. */
export class UploadItem {
  readonly file: File;
  readonly companyId: string;
  readonly purpose: FilePurpose;
  state = $state<ItemState>('waiting');
  sent = $state(0);
  message = $state('');
  /** Trying again may help. */
  again = $state(false);
  fileId = $state<string | null>(null);

  #slot: UploadSlot | null = null;
  // eslint-disable-next-line svelte/prefer-svelte-reactivity -- bookkeeping; no screen reads it
  #parts = new Map<number, string>();
  #stop = new AbortController();
  readonly #key: string;

  constructor(file: File, companyId: string, purpose: FilePurpose) {
    this.file = file;
    this.companyId = companyId;
    this.purpose = purpose;
    this.#key = noteKey({
      companyId,
      purpose,
      name: file.name,
      size: file.size,
      lastModified: file.lastModified,
    });
  }

  get fraction(): number {
    return this.file.size === 0 ? 0 : Math.min(1, this.sent / this.file.size);
  }

  get active(): boolean {
    return this.state === 'waiting' || this.state === 'sending' || this.state === 'checking';
  }

  /** Runs the upload to its end; a failure is a state, never thrown. Called again, it goes on. */
  async run(): Promise<void> {
    this.#stop = new AbortController();
    this.state = 'sending';
    this.message = '';
    try {
      const slot = (this.#slot ??= await this.#begin());
      this.fileId = slot.fileId;
      if (slot.mode === 'single') {
        await this.#sendSingle(slot);
      } else {
        await this.#sendParts(slot);
      }
      this.state = 'checking';
      this.#settle(await this.#finish(slot));
    } catch (problem) {
      if (isCancel(problem)) {
        this.state = 'cancelled';
        return;
      }
      this.state = 'failed';
      this.again = problem instanceof UploadProblem ? problem.again : true;
      this.message =
        problem instanceof UploadProblem ? problem.message : 'The upload stopped for an unknown reason.';
      // A single slot may have run out meanwhile; a new try begins with a new one.
      if (this.#slot?.mode === 'single') this.#slot = null;
    }
  }

  async cancel(): Promise<void> {
    this.#stop.abort();
    this.state = 'cancelled';
    dropNote(localStorage, this.#key);
    if (this.fileId !== null) await uploadApi.cancel(this.fileId).catch(() => undefined);
  }

  async #begin(): Promise<UploadSlot> {
    const { file, companyId, purpose } = this;
    const note = readNote(localStorage, this.#key, Date.now());
    const resumed = note ? await this.#resume(note) : null;
    if (resumed) return resumed;
    return uploadApi.start(
      { companyId, purpose, name: file.name, contentType: file.type, size: file.size },
      this.#stop.signal,
    );
  }

  /** Takes up an upload that was begun before a reload, if the server still waits for it. */
  async #resume(note: ResumeNote): Promise<UploadSlot | null> {
    const there = await uploadApi.state(note.fileId).catch(() => null);
    if (there?.state !== 'pending' || there.size !== this.file.size) {
      dropNote(localStorage, this.#key);
      return null;
    }
    for (const part of note.parts) this.#parts.set(part.number, part.etag);
    return {
      mode: 'parts',
      fileId: note.fileId,
      method: 'PUT',
      partBytes: uploadPartBytes,
      partCount: Math.ceil(this.file.size / uploadPartBytes),
    };
  }

  async #sendSingle(slot: Extract<UploadSlot, { mode: 'single' }>): Promise<void> {
    await sendBytes(slot, this.file, {
      onProgress: (sent) => (this.sent = sent),
      signal: this.#stop.signal,
    });
    this.sent = this.file.size;
  }

  async #sendParts(slot: Extract<UploadSlot, { mode: 'parts' }>): Promise<void> {
    const missing = Array.from({ length: slot.partCount }, (_, index) => index + 1).filter(
      (number) => !this.#parts.has(number),
    );
    for (let at = 0; at < missing.length; at += slotsAhead) {
      await this.#sendBatch(slot, missing.slice(at, at + slotsAhead));
    }
  }

  async #sendBatch(slot: Extract<UploadSlot, { mode: 'parts' }>, numbers: number[]): Promise<void> {
    for (let attempt = 1; ; attempt += 1) {
      try {
        const left = numbers.filter((number) => !this.#parts.has(number));
        if (left.length === 0) return;
        const { items } = await uploadApi.parts(slot.fileId, left, this.#stop.signal);
        for (const item of items) await this.#sendPart(slot, item);
        return;
      } catch (problem) {
        const helpless = !(problem instanceof UploadProblem) || !problem.again;
        if (helpless || attempt >= triesPerPart) throw problem;
        await new Promise((resolve) => setTimeout(resolve, 500 * 2 ** attempt));
      }
    }
  }

  async #sendPart(
    slot: Extract<UploadSlot, { mode: 'parts' }>,
    item: { number: number; url: string; headers: Record<string, string> },
  ): Promise<void> {
    const from = (item.number - 1) * slot.partBytes;
    const before = this.#arrivedBytes(slot.partBytes);
    const etag = await sendBytes(item, this.file.slice(from, from + slot.partBytes), {
      onProgress: (sent) => (this.sent = before + sent),
      signal: this.#stop.signal,
    });
    if (etag === null) {
      throw new UploadProblem('The file store did not confirm a part of the file.', { again: true });
    }
    this.#parts.set(item.number, etag);
    this.sent = this.#arrivedBytes(slot.partBytes);
    writeNote(localStorage, this.#key, { fileId: slot.fileId, parts: this.#partList(), at: Date.now() });
  }

  #arrivedBytes(partBytes: number): number {
    let bytes = 0;
    for (const number of this.#parts.keys()) {
      bytes += Math.min(partBytes, this.file.size - (number - 1) * partBytes);
    }
    return bytes;
  }

  #partList(): { number: number; etag: string }[] {
    return [...this.#parts].map(([number, etag]) => ({ number, etag })).sort((a, b) => a.number - b.number);
  }

  async #finish(slot: UploadSlot): Promise<UploadState> {
    try {
      return await uploadApi.finish(slot.fileId, { parts: this.#partList() }, this.#stop.signal);
    } catch (problem) {
      if (problem instanceof UploadProblem) {
        for (const number of problem.missing) this.#parts.delete(number);
      }
      throw problem;
    }
  }

  #settle(found: UploadState): void {
    dropNote(localStorage, this.#key);
    if (found.state === 'clean') {
      this.state = 'done';
      return;
    }
    throw new UploadProblem(
      found.refusedReason ? `The file was not taken. ${found.refusedReason}` : 'The file was not taken.',
      { again: false },
    );
  }
}

/** The uploads of one field. */
export class UploadList {
  items = $state<UploadItem[]>([]);
  /** What a screen reader hears, once per change of state. */
  announcement = $state('');

  get busy(): boolean {
    return this.items.some((item) => item.active);
  }

  get fileIds(): string[] {
    return this.items.flatMap((item) => (item.state === 'done' && item.fileId ? [item.fileId] : []));
  }

  /** Takes files and sends them one after the other. A single field keeps the newest only. */
  async take(files: File[], to: { companyId: string; purpose: FilePurpose; multiple: boolean }) {
    if (!to.multiple) {
      for (const item of this.items) if (item.active) void item.cancel();
      this.items = [];
    }
    const added = files.map((file) => new UploadItem(file, to.companyId, to.purpose));
    this.items = [...this.items, ...added];
    // Read back, so that what runs is what the screen watches.
    for (const item of this.items.slice(-added.length)) {
      if (item.state === 'waiting') await this.run(item);
    }
  }

  async run(item: UploadItem): Promise<void> {
    this.announcement = `Uploading ${item.file.name}.`;
    await item.run();
    if (item.state === 'done') this.announcement = `${item.file.name} is uploaded and checked.`;
    if (item.state === 'failed') this.announcement = `${item.file.name}: ${item.message}`;
  }

  async cancel(item: UploadItem): Promise<void> {
    this.announcement = `The upload of ${item.file.name} was cancelled.`;
    this.remove(item);
    await item.cancel();
  }

  remove(item: UploadItem): void {
    this.items = this.items.filter((other) => other !== item);
  }
}

/** What is said beside the field about what is taken. */
export function takenText(purpose: FilePurpose): string {
  return `${kindsText(purpose)}, at most ${uploadMaxBytes / 1024 / 1024} MB.`;
}
