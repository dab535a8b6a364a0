/**
 * Idempotency keys. v1: the first result, an error of the operation or a 500 included, is replayed for the key;
 * other parameters are an error; a second call while the first runs is a conflict. v2: successes are replayed,
 * failures run again.
 */
import { createHash } from 'node:crypto';
import { idempotencyInUse, idempotencyMismatch, invalidParam } from './errors.ts';
import type { IdempotencyRecord } from './records.ts';
import type { Store } from './store.ts';

const MAX_KEY = 255;

export class IdempotencyLayer {
  private readonly store: Store;
  private readonly running = new Set<string>();

  constructor(store: Store) {
    this.store = store;
  }

  fingerprint(method: string, path: string, body: string): string {
    return createHash('sha256').update(`${method} ${path}\n${body}`).digest('hex');
  }

  /** Claims the key. Returns what to replay, or undefined when the call is to be made. */
  begin(key: string, fingerprint: string): IdempotencyRecord | undefined {
    if (key.length > MAX_KEY) {
      throw invalidParam(undefined, `Idempotency keys can be at most ${String(MAX_KEY)} characters long.`);
    }
    const known = this.store.tables.idempotency.get(key);
    if (known !== undefined) {
      if (known.fingerprint !== fingerprint) throw idempotencyMismatch(key);
      return known;
    }
    if (this.running.has(key)) throw idempotencyInUse(key);
    this.running.add(key);
    return undefined;
  }

  keep(record: IdempotencyRecord): void {
    this.store.tables.idempotency.put(record.key, record);
  }

  end(key: string): void {
    this.running.delete(key);
  }
}
