import { lapseBids } from '../bids/index.ts';
import type { Database } from '../db/index.ts';
import { recoverMoney } from '../money/index.ts';
import { runRequestDeadlines } from './request-deadlines.ts';

export interface RecurringTask {
  name: string;
  everyMs: number;
  run: (db: Database, signal: AbortSignal) => Promise<void>;
}

/** What the worker does again and again: deadlines, recovery of outside calls, probes, sealing the audit trail. */
export const recurringTasks: readonly RecurringTask[] = [
  { name: 'request-deadlines', everyMs: 5_000, run: runRequestDeadlines },
  {
    name: 'bid-validity',
    everyMs: 30_000,
    run: async (db) => {
      await lapseBids(db);
    },
  },
  { name: 'money-recovery', everyMs: 5_000, run: recoverMoney },
];
