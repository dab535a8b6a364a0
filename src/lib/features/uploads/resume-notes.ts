/**
 * What the browser keeps of a large upload, so that it goes on after a reload: the id, and which parts
 * arrived with which ETag. Without storage (private windows) it simply starts anew.
 */
export interface ResumeNote {
  fileId: string;
  parts: { number: number; etag: string }[];
  at: number;
}

export interface Fingerprint {
  companyId: string;
  purpose: string;
  name: string;
  size: number;
  lastModified: number;
}

const prefix = 'coilyard-upload/';
/** The server clears unfinished uploads after a day. */
const keptMs = 23 * 3_600_000;

export function noteKey(of: Fingerprint): string {
  return prefix + [of.companyId, of.purpose, of.size, of.lastModified, of.name].join('/');
}

function isNote(value: unknown): value is ResumeNote {
  if (typeof value !== 'object' || value === null) return false;
  const { fileId, parts, at } = value as Partial<ResumeNote>;
  return (
    typeof fileId === 'string' &&
    typeof at === 'number' &&
    Array.isArray(parts) &&
    parts.every((part) => typeof part?.number === 'number' && typeof part.etag === 'string')
  );
}

/** What was kept of exactly this file; undefined when nothing, when it is too old, or unreadable. */
export function readNote(store: Storage, key: string, now: number): ResumeNote | undefined {
  try {
    const value: unknown = JSON.parse(store.getItem(key) ?? 'null');
    if (isNote(value) && now - value.at < keptMs) return value;
    store.removeItem(key);
  } catch {
    // No storage, or somebody else's text in it: start anew.
  }
  return undefined;
}

export function writeNote(store: Storage, key: string, note: ResumeNote): void {
  try {
    store.setItem(key, JSON.stringify(note));
  } catch {
    // Full or forbidden: the upload still runs, it just can not go on after a reload.
  }
}

export function dropNote(store: Storage, key: string): void {
  try {
    store.removeItem(key);
  } catch {
    // Nothing to drop without storage.
  }
}
