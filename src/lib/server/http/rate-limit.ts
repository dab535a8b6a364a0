import { eq, sql } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import { realNow } from '../adapters/clock.ts';
import type { Database } from '../db/index.ts';
import { rateLimit } from '../db/schema/platform.ts';

/**
 * Counts a try under a key in a fixed window; throws when the limit is passed. In the database, so that
 * several instances count together and a restart forgets nothing.
 */
export async function countAgainstLimit(
  db: Database,
  key: string,
  limit: { count: number; windowMs: number },
): Promise<void> {
  const now = realNow();
  const [row] = await db
    .insert(rateLimit)
    .values({ key, count: 1, windowEndsAt: now + limit.windowMs })
    .onConflictDoUpdate({
      target: rateLimit.key,
      set: {
        count: sql`case when ${rateLimit.windowEndsAt} <= ${now} then 1 else ${rateLimit.count} + 1 end`,
        windowEndsAt: sql`case when ${rateLimit.windowEndsAt} <= ${now} then ${now + limit.windowMs} else ${rateLimit.windowEndsAt} end`,
      },
    })
    .returning();
  if (row && row.count > limit.count) {
    const seconds = Math.max(1, Math.ceil((row.windowEndsAt - now) / 1000));
    throw new AppError('too-many-requests', {
      detail: `That was too often in a short time. Please try again in ${seconds} s.`,
    });
  }
}

/** Takes a key's count back, after a success. */
export async function forgetCount(db: Database, key: string): Promise<void> {
  await db.delete(rateLimit).where(eq(rateLimit.key, key));
}
