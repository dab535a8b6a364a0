import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import path from 'node:path';

function alive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch {
    return false;
  }
}

/** One stack per data folder: two would write into the same files. Returns what gives the folder free again. */
export function lock(dataDir: string): () => void {
  const file = path.join(dataDir, 'stack.pid');
  if (existsSync(file)) {
    const pid = Number(readFileSync(file, 'utf8'));
    if (pid !== process.pid && alive(pid)) {
      throw new Error(
        `${dataDir} is in use by process ${String(pid)}. Stop it first, or choose another data folder.`,
      );
    }
  }
  writeFileSync(file, String(process.pid));
  return () => rmSync(file, { force: true });
}

export interface Closers {
  add: (close: () => Promise<void> | void) => void;
  run: () => Promise<void>;
}

/** What was started is stopped in the opposite order, each whatever happens to the others. */
export function closers(): Closers {
  const list: (() => Promise<void> | void)[] = [];
  return {
    add: (close) => void list.push(close),
    run: async () => {
      for (let close = list.pop(); close !== undefined; close = list.pop()) {
        try {
          await close();
        } catch (error) {
          process.stderr.write(`while stopping: ${error instanceof Error ? error.message : String(error)}\n`);
        }
      }
    },
  };
}
