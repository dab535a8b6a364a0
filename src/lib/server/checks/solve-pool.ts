import { availableParallelism } from 'node:os';
import { fileURLToPath } from 'node:url';
import { Piscina } from 'piscina';
import { AppError } from '../../domain/errors.ts';
import { config } from '../config/index.ts';
import { log } from '../log/index.ts';
import type { SolveOutcome, SolveTask } from './solve-thread.ts';

/** Waiting tasks beyond this are refused at once instead of piling up. */
const mostWaiting = 200;
/** One check takes a few seconds of one core; this only stops what has gone wrong, on a busy server too. */
const timeLimitMs = 60_000;

let pool: Piscina<SolveTask, SolveOutcome> | undefined;

/** The threads of this process, made when first needed: one core is left for the server. */
function threads(): Piscina<SolveTask, SolveOutcome> {
  if (pool) return pool;
  const built = config().solveThread;
  const made = new Piscina<SolveTask, SolveOutcome>({
    filename: built ?? fileURLToPath(new URL('./solve-thread.ts', import.meta.url)),
    ...(built ? {} : { execArgv: ['--import', 'tsx'] }),
    minThreads: 0,
    maxThreads: Math.max(1, availableParallelism() - 1),
    maxQueue: mostWaiting,
    idleTimeout: 60_000,
  });
  made.on('error', (error: unknown) => {
    log().error({ error: error instanceof Error ? error.message : String(error) }, 'solver thread failed');
  });
  pool = made;
  return made;
}

/**
 * Runs a task on a solver thread and returns the result's text. A full queue is `busy`, a run over the
 * time limit `limit-exceeded`; what the method refuses is `invalid-input` with its words.
 */
export async function solveInThread(
  task: SolveTask,
  options: { signal?: AbortSignal; timeLimitMs?: number } = {},
): Promise<string> {
  const limit = AbortSignal.timeout(options.timeLimitMs ?? timeLimitMs);
  let outcome: SolveOutcome;
  try {
    outcome = await threads().run(task, {
      signal: options.signal ? AbortSignal.any([limit, options.signal]) : limit,
    });
  } catch (error) {
    if (limit.aborted) {
      throw new AppError('limit-exceeded', {
        detail: `This took longer than ${(options.timeLimitMs ?? timeLimitMs) / 1000} s and was stopped. Fewer turns or a simpler bank will do.`,
        cause: error,
      });
    }
    if (error instanceof Error && /queue is at limit/i.test(error.message)) {
      throw new AppError('busy', { cause: error });
    }
    throw error;
  }
  if (!outcome.ok) {
    throw new AppError('invalid-input', {
      detail: outcome.message,
      fields: { [outcome.field]: outcome.message },
    });
  }
  return outcome.body;
}

/** Ends the threads, so that a process or a test can end. */
export async function closeSolvePool(): Promise<void> {
  const closing = pool;
  pool = undefined;
  await closing?.destroy();
}
