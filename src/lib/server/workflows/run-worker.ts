import { setTimeout as wait } from 'node:timers/promises';
import type { Database } from '../db/index.ts';
import { claimJob, runJob } from '../jobs/index.ts';
import { log } from '../log/index.ts';
import { sendDueMails, type SendMail } from '../outbox/index.ts';
import { jobDefinitions } from './job-registry.ts';
import { recurringTasks } from './recurring.ts';

interface WorkerOptions {
  owner: string;
  send: SendMail;
  signal: AbortSignal;
  idleMs?: number;
}

async function pause(ms: number, signal: AbortSignal): Promise<void> {
  await wait(ms, undefined, { signal }).catch(() => undefined);
}

/** One lane: repeats its step, rests when there was nothing to do, survives an error with a longer rest. */
async function lane(name: string, idleMs: number, signal: AbortSignal, step: () => Promise<boolean>) {
  while (!signal.aborted) {
    let busy = false;
    try {
      busy = await step();
    } catch (error) {
      log().error(
        { lane: name, error: error instanceof Error ? error.message : String(error) },
        'worker lane failed',
      );
      await pause(2_000, signal);
    }
    if (!busy) await pause(idleMs, signal);
  }
}

/** Runs mails, jobs and recurring tasks until the signal is aborted; each lane ends its step first. */
export async function runWorker(db: Database, options: WorkerOptions): Promise<void> {
  const { owner, send, signal } = options;
  const idleMs = options.idleMs ?? 250;
  await Promise.all([
    lane('mail', idleMs, signal, async () => (await sendDueMails(db, send, { owner, signal })).sent > 0),
    ...[false, true].map((long) => {
      const definitions = jobDefinitions.filter((definition) => (definition.long ?? false) === long);
      return lane(long ? 'long jobs' : 'jobs', idleMs, signal, async () => {
        const row = await claimJob(db, owner, definitions);
        if (!row) return false;
        await runJob(db, owner, definitions, row, signal);
        return true;
      });
    }),
    ...recurringTasks.map((task) =>
      lane(task.name, task.everyMs, signal, async () => {
        await task.run(db, signal);
        return false;
      }),
    ),
  ]);
}

/**
 * For tests and the seed: does everything that is due now, in this process, until nothing is left or
 * `until` says enough. Jobs that wait for a retry are run at once.
 */
export async function drainJobs(
  db: Database,
  options: { send: SendMail; until?: () => Promise<boolean>; limit?: number },
): Promise<void> {
  const signal = new AbortController().signal;
  for (let round = 0; round < (options.limit ?? 500); round += 1) {
    let did = 0;
    for (const task of recurringTasks) if (!task.workerOnly) await task.run(db, signal);
    for (;;) {
      const row = await claimJob(db, 'drain', jobDefinitions);
      if (!row) break;
      await runJob(db, 'drain', jobDefinitions, row, signal);
      did += 1;
    }
    did += (await sendDueMails(db, options.send, { owner: 'drain', limit: 100 })).sent;
    if (options.until && (await options.until())) return;
    if (did === 0) return;
  }
  throw new Error('the work did not come to an end');
}
