/**
 * State of the stand-in: tables in memory, every request's changes appended as one line to a journal before
 * the response leaves, so that it survives a kill at any moment. A torn last line is a request that was never
 * answered and is dropped when the journal is read again.
 */
import { createHash } from 'node:crypto';
import {
  closeSync,
  existsSync,
  ftruncateSync,
  mkdirSync,
  openSync,
  readFileSync,
  renameSync,
  writeFileSync,
  writeSync,
} from 'node:fs';
import { join } from 'node:path';
import type { Tables } from './records.ts';
import { TABLE_NAMES } from './records.ts';

export type TableName = keyof Tables;
type Change = [TableName, string, unknown];

export class Table<T> {
  private readonly rows = new Map<string, T>();
  private readonly touched: (id: string) => void;

  constructor(touched: (id: string) => void) {
    this.touched = touched;
  }

  get(id: string): T | undefined {
    return this.rows.get(id);
  }

  put(id: string, row: T): T {
    this.rows.set(id, row);
    this.touched(id);
    return row;
  }

  delete(id: string): void {
    this.rows.delete(id);
    this.touched(id);
  }

  /** In order of creation. */
  all(): T[] {
    return [...this.rows.values()];
  }

  entries(): IterableIterator<[string, T]> {
    return this.rows.entries();
  }

  get size(): number {
    return this.rows.size;
  }

  /** Only for reading the journal. */
  load(id: string, row: T | null): void {
    if (row === null) this.rows.delete(id);
    else this.rows.set(id, row);
  }

  clear(): void {
    this.rows.clear();
  }
}

const ALPHABET = '0123456789ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz';

export class Store {
  readonly tables: { [K in TableName]: Table<Tables[K]> };
  private readonly dirty = new Map<string, [TableName, string]>();
  private readonly file: string;
  private fd: number;
  private lines = 0;
  private seed: string;

  constructor(directory: string, seed: string) {
    mkdirSync(directory, { recursive: true });
    this.file = join(directory, 'payments.jsonl');
    this.seed = seed;
    const make = <K extends TableName>(name: K): Table<Tables[K]> =>
      new Table<Tables[K]>((id) => this.dirty.set(`${name}/${id}`, [name, id]));
    this.tables = Object.fromEntries(TABLE_NAMES.map((name) => [name, make(name)])) as typeof this.tables;
    this.read();
    this.fd = openSync(this.file, 'a');
  }

  private read(): void {
    if (!existsSync(this.file)) return;
    for (const line of readFileSync(this.file, 'utf8').split('\n')) {
      if (line === '') continue;
      let changes: Change[];
      try {
        changes = JSON.parse(line) as Change[];
      } catch {
        continue;
      }
      this.lines += 1;
      for (const [name, id, row] of changes) {
        const table = this.tables[name] as Table<unknown> | undefined;
        table?.load(id, row);
      }
    }
    this.compact();
  }

  private compact(): void {
    const rows = TABLE_NAMES.reduce((sum, name) => sum + this.tables[name].size, 0);
    if (this.lines < 1000 || this.lines < rows * 2) return;
    const temporary = `${this.file}.new`;
    const lines: string[] = [];
    for (const name of TABLE_NAMES) {
      for (const [id, row] of this.tables[name].entries()) lines.push(JSON.stringify([[name, id, row]]));
    }
    writeFileSync(temporary, lines.length === 0 ? '' : `${lines.join('\n')}\n`);
    renameSync(temporary, this.file);
    this.lines = lines.length;
  }

  /** Writes what the request changed. Nothing may be answered before this returned. */
  commit(): void {
    if (this.dirty.size === 0) return;
    const changes: Change[] = [...this.dirty.values()].map(([name, id]) => [
      name,
      id,
      (this.tables[name] as Table<unknown>).get(id) ?? null,
    ]);
    this.dirty.clear();
    // The leading newline closes a line that a kill may have torn.
    writeSync(this.fd, `\n${JSON.stringify(changes)}`);
    this.lines += 1;
  }

  /** Forgets everything. */
  reset(seed = this.seed): void {
    for (const name of TABLE_NAMES) this.tables[name].clear();
    this.dirty.clear();
    this.seed = seed;
    ftruncateSync(this.fd, 0);
    this.lines = 0;
  }

  close(): void {
    this.commit();
    closeSync(this.fd);
  }

  private meta(key: string): number {
    return this.tables.meta.get(key) ?? 0;
  }

  /** Seconds since 1970 on the service's own clock, which control calls may shift. */
  now(): number {
    return Math.floor(this.nowMillis() / 1000);
  }

  nowMillis(): number {
    return Date.now() + this.meta('clock_offset_ms');
  }

  setClockOffset(milliseconds: number): void {
    this.tables.meta.put('clock_offset_ms', milliseconds);
  }

  get clockOffsetMillis(): number {
    return this.meta('clock_offset_ms');
  }

  /** Ids look random and repeat for the same seed and order of calls. */
  id(prefix: string, length = 24): string {
    const count = this.meta('ids') + 1;
    this.tables.meta.put('ids', count);
    const digest = createHash('sha512')
      .update(`${this.seed}:${String(count)}`)
      .digest();
    let name = '';
    for (let at = 0; at < length; at += 1)
      name += ALPHABET[(digest[at % digest.length] ?? 0) % ALPHABET.length] ?? '0';
    return `${prefix}_${name}`;
  }
}
