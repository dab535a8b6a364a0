import { and, desc, eq, gt, ne } from 'drizzle-orm';
import { createOTP } from '@better-auth/utils/otp';
import { symmetricDecrypt } from 'better-auth/crypto';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { realNow } from '../adapters/clock.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Reader } from '../db/index.ts';
import { session, twoFactor, user } from '../db/schema/auth.ts';
import { sessionLimits } from './create.ts';
import { codeOf, requireGoodPassword, type SignInContext } from './flows.ts';
import { countTry, noSoonerThan } from './limits.ts';
import { mailSecurityNotice, type SecurityNotice } from './mails.ts';

/** Every use-case here is about the actor's own account: there is no other id to give. */
async function noteSecurityStep(
  db: Database,
  actor: Actor,
  action: string,
  notice: SecurityNotice,
): Promise<void> {
  await transact(db, async (tx) => {
    await audit(tx, actor, { action, subjectType: 'user', subjectId: actor.userId });
    await mailSecurityNotice(tx, { id: actor.userId, email: actor.email }, notice);
  });
}

export interface ProfileInput {
  name: string;
  timeZone: string;
  unitSet: 'metric' | 'inch';
}

export async function updateProfile(db: Database, actor: Actor, input: ProfileInput): Promise<void> {
  await transact(db, async (tx) => {
    await tx
      .update(user)
      .set({ ...input, updatedAt: new Date(realNow()) })
      .where(eq(user.id, actor.userId));
    await audit(tx, actor, {
      action: 'user.update-profile',
      subjectType: 'user',
      subjectId: actor.userId,
      detail: { timeZone: input.timeZone, unitSet: input.unitSet },
    });
  });
}

export interface SessionView {
  id: string;
  current: boolean;
  createdAt: number;
  usedAt: number;
  ipAddress: string | null;
  userAgent: string | null;
}

/** The actor's live sessions, the newest first; never their tokens. */
export async function listSessions(
  reader: Reader,
  actor: Actor,
  currentId: string | null,
): Promise<SessionView[]> {
  const rows = await reader
    .select({
      id: session.id,
      createdAt: session.createdAt,
      usedAt: session.updatedAt,
      ipAddress: session.ipAddress,
      userAgent: session.userAgent,
    })
    .from(session)
    .where(and(eq(session.userId, actor.userId), gt(session.expiresAt, new Date(realNow()))))
    .orderBy(desc(session.createdAt));
  return rows.map((row) => ({
    ...row,
    createdAt: row.createdAt.getTime(),
    usedAt: row.usedAt.getTime(),
    current: row.id === currentId,
  }));
}

/** Ends one of the actor's own sessions; somebody else's is not found. */
export async function endSession(db: Database, actor: Actor, sessionId: string): Promise<void> {
  await transact(db, async (tx) => {
    const ended = await tx
      .delete(session)
      .where(and(eq(session.id, sessionId), eq(session.userId, actor.userId)));
    if (ended.rowsAffected === 0) throw new AppError('not-found');
    await audit(tx, actor, { action: 'user.end-session', subjectType: 'user', subjectId: actor.userId });
  });
}

/** Ends all of the actor's sessions but this one; returns how many. */
export async function endOtherSessions(db: Database, actor: Actor, currentId: string): Promise<number> {
  return transact(db, async (tx) => {
    const ended = await tx
      .delete(session)
      .where(and(eq(session.userId, actor.userId), ne(session.id, currentId)));
    await audit(tx, actor, {
      action: 'user.end-other-sessions',
      subjectType: 'user',
      subjectId: actor.userId,
      detail: { count: ended.rowsAffected },
    });
    return ended.rowsAffected;
  });
}

async function requirePassword(
  context: SignInContext,
  actor: Actor,
  password: string,
  field: string,
): Promise<void> {
  await countTry(context.db, 'password', { account: actor.userId, address: context.address });
  try {
    await context.auth.api.verifyPassword({ body: { password }, headers: context.headers });
  } catch (problem) {
    codeOf(problem);
    throw new AppError('invalid-input', { fields: { [field]: 'This is not your present password.' } });
  }
}

/** Entering the password again makes the session fresh for money and security steps. */
export async function confirmPassword(
  context: SignInContext,
  actor: Actor,
  sessionId: string,
  password: string,
): Promise<void> {
  await requirePassword(context, actor, password, 'currentPassword');
  await context.db
    .update(session)
    .set({ freshUntil: new Date(realNow() + sessionLimits.freshMs) })
    .where(and(eq(session.id, sessionId), eq(session.userId, actor.userId)));
}

/** Sets a new password; the other sessions end, this one gets a new token. */
export async function changePassword(
  context: SignInContext,
  actor: Actor,
  input: { currentPassword: string; newPassword: string },
): Promise<void> {
  await requirePassword(context, actor, input.currentPassword, 'currentPassword');
  requireGoodPassword(input.newPassword, [actor.name, actor.email], 'newPassword');
  await context.auth.api.changePassword({
    body: { ...input, revokeOtherSessions: true },
    headers: context.headers,
  });
  await noteSecurityStep(context.db, actor, 'user.change-password', 'password-changed');
}

/** Sends a mail to the new address; the account changes once the link there is used. Known addresses get the same answer. */
export async function askAddressChange(
  context: SignInContext,
  actor: Actor,
  input: { email: string; currentPassword: string },
): Promise<void> {
  await requirePassword(context, actor, input.currentPassword, 'currentPassword');
  if (input.email === actor.email) {
    throw new AppError('invalid-input', { fields: { email: 'This is your address already.' } });
  }
  await countTry(context.db, 'mail', { account: input.email, address: context.address });
  await noSoonerThan(500, () =>
    context.auth.api.changeEmail({ body: { newEmail: input.email }, headers: context.headers }),
  );
  await noteSecurityStep(context.db, actor, 'user.ask-address-change', 'address-change-asked');
}

export interface PendingTwoFactor {
  uri: string;
  secret: string;
  backupCodes: string[];
}

/** Begins the set-up: a secret for the authenticator and backup codes, in force once a code is entered. */
export async function startTwoFactor(context: SignInContext, actor: Actor, password: string): Promise<void> {
  await requirePassword(context, actor, password, 'currentPassword');
  try {
    await context.auth.api.enableTwoFactor({ body: { password }, headers: context.headers });
  } catch (problem) {
    codeOf(problem);
    throw new AppError('state-conflict', { detail: 'Two-factor sign-in is set up already.' });
  }
}

/** What the person has to scan and keep while the set-up is not confirmed; null otherwise. */
export async function pendingTwoFactor(
  context: SignInContext,
  actor: Actor,
): Promise<PendingTwoFactor | null> {
  const [row] = await context.db.select().from(twoFactor).where(eq(twoFactor.userId, actor.userId));
  if (!row || row.verified !== false) return null;
  const { secretConfig: key } = await context.auth.$context;
  const secret = await symmetricDecrypt({ key, data: row.secret });
  const codes: unknown = JSON.parse(await symmetricDecrypt({ key, data: row.backupCodes }));
  const uri = createOTP(secret, { digits: 6 }).url('Coilyard', actor.email);
  return {
    uri,
    secret: new URL(uri).searchParams.get('secret') ?? '',
    backupCodes: Array.isArray(codes) ? codes.map(String) : [],
  };
}

/** Ends the set-up with a code of the authenticator. */
export async function confirmTwoFactor(context: SignInContext, actor: Actor, code: string): Promise<void> {
  await countTry(context.db, 'second-factor', { account: actor.userId, address: context.address });
  try {
    await context.auth.api.verifyTOTP({ body: { code: code.replace(/\s/g, '') }, headers: context.headers });
  } catch (problem) {
    codeOf(problem);
    throw new AppError('invalid-input', {
      fields: {
        code: 'This code is not right. Codes change every 30 seconds; check the clock of your device.',
      },
    });
  }
  await noteSecurityStep(context.db, actor, 'user.two-factor-on', 'two-factor-on');
}

export async function stopTwoFactor(context: SignInContext, actor: Actor, password: string): Promise<void> {
  await requirePassword(context, actor, password, 'currentPassword');
  await context.auth.api.disableTwoFactor({ body: { password }, headers: context.headers });
  await noteSecurityStep(context.db, actor, 'user.two-factor-off', 'two-factor-off');
}
