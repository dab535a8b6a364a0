import { probeServices } from '../admin/index.ts';
import { sealAudit } from '../audit/seals.ts';
import { lapseBids } from '../bids/index.ts';
import { clearOldHeatings } from '../checks/index.ts';
import type { Database } from '../db/index.ts';
import { clearUnfinishedUploads } from '../files/index.ts';
import { recoverMoney } from '../money/index.ts';
import { runOrderDeadlines } from './order-deadlines.ts';
import { runRequestDeadlines } from './request-deadlines.ts';

export interface RecurringTask {
  name: string;
  everyMs: number;
  run: (db: Database, signal: AbortSignal) => Promise<void>;
  /** Looks at the world around; no state of the application waits for it, so a drain leaves it out. */
  workerOnly?: boolean;
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
  {
    name: 'unfinished-uploads',
    everyMs: 60_000,
    run: async (db, signal) => {
      await clearUnfinishedUploads(db, signal);
    },
  },
  {
    name: 'audit-seals',
    everyMs: 60_000,
    run: async (db, signal) => {
      await sealAudit(db, signal);
    },
  },
  { name: 'old-heatings', everyMs: 600_000, run: clearOldHeatings },
  { name: 'service-probes', everyMs: 30_000, run: (db) => probeServices(db), workerOnly: true },
  { name: 'order-deadlines', everyMs: 5_000, run: runOrderDeadlines },
];
