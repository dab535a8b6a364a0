import type { Database } from '../db/index.ts';

export interface RecurringTask {
  name: string;
  everyMs: number;
  run: (db: Database, signal: AbortSignal) => Promise<void>;
}

/** What the worker does again and again: deadlines, recovery of outside calls, probes, sealing the audit trail. */
export const recurringTasks: readonly RecurringTask[] = [];
