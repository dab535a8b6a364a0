import { createHash } from 'node:crypto';
import { setTimeout as wait } from 'node:timers/promises';
import { hourMs } from '../../domain/dates.ts';
import { realNow } from '../adapters/clock.ts';
import { config } from '../config/index.ts';
import type { Database } from '../db/index.ts';
import { countAgainstLimit, forgetCount } from '../http/rate-limit.ts';

/** Keys carry no address in the clear. */
function keyOf(purpose: string, kind: 'account' | 'address', value: string): string {
  const digest = createHash('sha256').update(value.trim().toLowerCase()).digest('base64url').slice(0, 24);
  return `${purpose}/${kind}/${digest}`;
}

/**
 * Counts a try against the account named and against the address it comes from; an office behind one
 * address may try five times as often. Same for known and unknown accounts.
 */
export async function countTry(
  db: Database,
  purpose: 'sign-in' | 'second-factor' | 'mail' | 'sign-up' | 'password',
  who: { account?: string; address: string },
): Promise<void> {
  const count = config().limits.signInAttemptsPerQuarterHour;
  const windowMs = hourMs / 4;
  await countAgainstLimit(db, keyOf(purpose, 'address', who.address), { count: count * 5, windowMs });
  if (who.account) await countAgainstLimit(db, keyOf(purpose, 'account', who.account), { count, windowMs });
}

/** After a success the tries of the account start anew. */
export async function forgetTries(
  db: Database,
  purpose: 'sign-in' | 'second-factor',
  account: string,
): Promise<void> {
  await forgetCount(db, keyOf(purpose, 'account', account));
}

/**
 * Answers no sooner than `ms` after the start, so that the time does not tell whether an address is
 * known. Longer than the work takes on a quiet machine.
 */
export async function noSoonerThan<T>(ms: number, work: () => Promise<T>): Promise<T> {
  const start = realNow();
  try {
    return await work();
  } finally {
    const rest = ms - (realNow() - start);
    if (rest > 0) await wait(rest);
  }
}
