import { eq } from 'drizzle-orm';
import { config } from '../config/index.ts';
import type { Database, Reader } from '../db/index.ts';
import { setting } from '../db/schema/platform.ts';

/** Leases, sessions, signatures and timeouts run on real time. */
export function realNow(): number {
  return Date.now();
}

const offsetKey = 'clock-offset-ms';

async function offset(reader: Reader): Promise<number> {
  if (config().mode === 'production') return 0;
  const [row] = await reader.select().from(setting).where(eq(setting.key, offsetKey));
  return row ? Number(row.value) : 0;
}

/**
 * Business time (deadlines, windows, stamps), ms UTC: real time plus an offset kept in the database,
 * so that demo and tests can move days in a moment. Production has no offset.
 */
export async function businessNow(reader: Reader): Promise<number> {
  return Date.now() + (await offset(reader));
}

/** Moves business time by `ms`; refused in production. */
export async function moveClock(db: Database, ms: number): Promise<number> {
  if (config().mode === 'production') throw new Error('the business clock does not move in production');
  const next = (await offset(db)) + ms;
  await db
    .insert(setting)
    .values({ key: offsetKey, value: String(next) })
    .onConflictDoUpdate({ target: setting.key, set: { value: String(next) } });
  return Date.now() + next;
}
