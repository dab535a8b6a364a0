import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { realNow } from '../adapters/clock.ts';
import type { Database } from '../db/index.ts';
import { session } from '../db/schema/auth.ts';
import { actorOfUser } from './actor.ts';
import { sessionLimits, type Auth } from './create.ts';

export interface SessionState {
  id: string;
  /** Until then money and security steps need no new password (real time, ms). */
  freshUntil: number;
}

export interface Visitor {
  actor: Actor;
  session: SessionState;
}

/** Use moves the freshness on, but not more often than once a minute. */
const freshStepMs = 60_000;

/**
 * The person behind the request's cookie, looked up once per request; undefined when there is no session
 * or it has ended. Idle sessions end by better-auth's expiry, used ones by our absolute limit.
 */
export async function resolveVisitor(
  db: Database,
  auth: Auth,
  headers: Headers,
  requestId: string,
): Promise<Visitor | undefined> {
  const found = await auth.api.getSession({ headers });
  if (!found) return undefined;
  const now = realNow();
  if (found.session.createdAt.getTime() + sessionLimits.absoluteMs <= now) {
    await db.delete(session).where(eq(session.id, found.session.id));
    return undefined;
  }
  let freshUntil = found.session.freshUntil?.getTime() ?? 0;
  if (freshUntil > now && freshUntil < now + sessionLimits.freshMs - freshStepMs) {
    freshUntil = now + sessionLimits.freshMs;
    await db
      .update(session)
      .set({ freshUntil: new Date(freshUntil) })
      .where(and(eq(session.id, found.session.id), eq(session.userId, found.user.id)));
  }
  const row = {
    ...found.user,
    twoFactorEnabled: found.user.twoFactorEnabled ?? false,
    isAdmin: found.user.isAdmin ?? false,
    timeZone: found.user.timeZone ?? 'Europe/Berlin',
    unitSet: found.user.unitSet === 'inch' ? ('inch' as const) : ('metric' as const),
  };
  return { actor: await actorOfUser(db, row, requestId), session: { id: found.session.id, freshUntil } };
}

/** For money, payee and role changes: the password was entered, and no half hour passed without use since. */
export function requireFreshSession(state: SessionState | null): void {
  if (!state) throw new AppError('sign-in-needed');
  if (state.freshUntil <= realNow()) throw new AppError('fresh-sign-in-needed');
}
