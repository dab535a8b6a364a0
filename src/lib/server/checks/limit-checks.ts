import { config } from '../config/index.ts';
import type { Database } from '../db/index.ts';
import { countAgainstLimit } from '../http/rate-limit.ts';

/** Counts a check against the limit of the account, or of the address where there is none. */
export async function limitChecks(
  db: Database,
  who: { userId: string } | { address: string },
): Promise<void> {
  const key = 'userId' in who ? `checks/user/${who.userId}` : `checks/address/${who.address}`;
  await countAgainstLimit(db, key, { count: config().limits.publicChecksPerMinute, windowMs: 60_000 });
}
