import { AppError } from '../../domain/errors.ts';
import type { CheckResult, Requirement, SolverSetting } from '../../induction/check/types.ts';
import { methodVersion } from '../../induction/version.ts';
import { requirementKey } from './requirement-key.ts';
import { solveInThread } from './solve-pool.ts';

/** Stored results are kept below this. */
export const mostResultBytes = 256_000;
/** Results kept in memory, the latest used last. */
const mostKept = 200;

export interface CheckRun {
  requirementText: string;
  requirementHash: string;
  setting: SolverSetting;
  methodVersion: string;
  /** The result's JSON, byte for byte as it is stored and sent. */
  body: string;
}

const kept = new Map<string, string>();
const underway = new Map<string, Promise<string>>();

function remember(key: string, body: string): void {
  kept.delete(key);
  kept.set(key, body);
  const oldest = kept.keys().next();
  if (kept.size > mostKept && !oldest.done) kept.delete(oldest.value);
}

async function solved(key: string, requirement: Requirement, setting: SolverSetting): Promise<string> {
  const known = kept.get(key);
  if (known !== undefined) {
    remember(key, known);
    return known;
  }
  // The same question asked twice at once is solved once.
  const running = underway.get(key);
  if (running) return running;
  const work = solveInThread({ kind: 'check', requirement, setting });
  underway.set(key, work);
  try {
    const body = await work;
    if (Buffer.byteLength(body) > mostResultBytes) {
      throw new AppError('limit-exceeded', {
        detail: 'The bank has more settings than one check can hold. Enter fewer groups, totals or taps.',
      });
    }
    remember(key, body);
    return body;
  } finally {
    underway.delete(key);
  }
}

/** Runs the check on a solver thread, or takes it from memory: same requirement, setting and method give the same. */
export async function runCheck(requirement: Requirement, setting: SolverSetting): Promise<CheckRun> {
  const { text, hash } = requirementKey(requirement);
  const body = await solved(`${methodVersion}/${setting}/${hash}`, requirement, setting);
  return { requirementText: text, requirementHash: hash, setting, methodVersion, body };
}

/** A stored or fresh body as the result it is; it was written by the check itself. */
export function resultOf(body: string): CheckResult {
  return JSON.parse(body) as CheckResult;
}
