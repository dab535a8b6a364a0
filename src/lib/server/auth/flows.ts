import { isAPIError } from 'better-auth/api';
import { eq } from 'drizzle-orm';
import { z } from 'zod';
import { AppError } from '../../domain/errors.ts';
import { audit } from '../audit/index.ts';
import { isUniqueViolation } from '../db/constraint.ts';
import { transact, type Database } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { log } from '../log/index.ts';
import { loadActor } from './actor.ts';
import type { Auth } from './create.ts';
import { countTry, forgetTries, noSoonerThan } from './limits.ts';
import { mailSecurityNotice } from './mails.ts';
import { passwordProblem } from './password.ts';

/** What a way in needs: the request's headers (cookies), where it comes from, and its id. */
export interface SignInContext {
  db: Database;
  auth: Auth;
  headers: Headers;
  address: string;
  requestId: string;
}

/** Answers about addresses take this long, known or not; the work takes a fifth of it on a quiet machine. */
const answerMs = 500;

/** The code of an error of better-auth; everything else is thrown on. */
export function codeOf(problem: unknown): string {
  if (!isAPIError(problem)) throw problem;
  return problem.body?.code ?? String(problem.status);
}

export function requireGoodPassword(password: string, about: readonly string[], field = 'password'): void {
  const problem = passwordProblem(password, about);
  if (problem) throw new AppError('invalid-input', { fields: { [field]: problem } });
}

/**
 * Makes an account that waits for its address to be confirmed. For an address that has one already the
 * answer is the same, and the mail tells its owner.
 */
export async function signUp(
  { db, auth, headers, address }: SignInContext,
  input: { name: string; email: string; password: string },
): Promise<void> {
  await countTry(db, 'sign-up', { address });
  await countTry(db, 'mail', { account: input.email, address });
  requireGoodPassword(input.password, [input.name, input.email]);
  await noSoonerThan(answerMs, async () => {
    await auth.api.signUpEmail({ body: input, headers });
  });
}

export type SignInOutcome = 'signed-in' | 'second-factor';

/** Signs in, or asks for the second factor. Wrong password and unknown address look and last alike. */
export async function signIn(
  { db, auth, headers, address, requestId }: SignInContext,
  input: { email: string; password: string; remember: boolean },
): Promise<SignInOutcome> {
  await countTry(db, 'sign-in', { account: input.email, address });
  try {
    // An unknown address costs a hash too.
    const answer = await auth.api.signInEmail({
      body: { email: input.email, password: input.password, rememberMe: input.remember },
      headers,
    });
    await forgetTries(db, 'sign-in', input.email);
    if ('twoFactorRedirect' in answer) return 'second-factor';
    await auditUser(db, answer.user.id, 'user.sign-in', requestId);
    return 'signed-in';
  } catch (problem) {
    const code = codeOf(problem);
    if (code === 'EMAIL_NOT_VERIFIED') {
      // Only who knows the password hears this; the mail has been sent again.
      throw new AppError('email-not-verified');
    }
    log().warn({ requestId, event: 'sign-in-refused' }, 'sign-in refused');
    throw new AppError('wrong-sign-in', {
      fields: { email: 'E-mail address and password do not fit together.' },
    });
  }
}

async function auditUser(db: Database, userId: string, action: string, requestId: string): Promise<void> {
  await transact(db, async (tx) => {
    const by = await loadActor(tx, userId, requestId);
    await audit(tx, by, { action, subjectType: 'user', subjectId: userId });
  });
}

/** The second step: a code of the authenticator, or one of the backup codes. */
export async function answerSecondFactor(
  { db, auth, headers, address, requestId }: SignInContext,
  input: { code: string; backup: boolean; trustDevice: boolean },
): Promise<void> {
  await countTry(db, 'second-factor', { address });
  const body = { code: input.code.replace(/\s/g, ''), trustDevice: input.trustDevice };
  try {
    const answer = input.backup
      ? await auth.api.verifyBackupCode({ body, headers })
      : await auth.api.verifyTOTP({ body, headers });
    await auditUser(db, answer.user.id, 'user.sign-in-second-factor', requestId);
  } catch (problem) {
    const code = codeOf(problem);
    if (code === 'INVALID_TWO_FACTOR_COOKIE' || code === 'TOO_MANY_ATTEMPTS_REQUEST_NEW_CODE') {
      throw new AppError('sign-in-needed', {
        detail: 'This took too long or too many tries. Please sign in again with your password.',
      });
    }
    if (code === 'ACCOUNT_TEMPORARILY_LOCKED') {
      throw new AppError('too-many-requests', {
        detail: 'Too many wrong codes. Please try again in a quarter of an hour.',
      });
    }
    log().warn({ requestId, event: 'second-factor-refused' }, 'second factor refused');
    throw new AppError('invalid-input', {
      fields: {
        code: input.backup
          ? 'This backup code is not right, or was used.'
          : 'This code is not right. Codes change every 30 seconds.',
      },
    });
  }
}

/** Sends the mail that confirms an address once more, if there is an account that waits for it. */
export async function sendVerificationAgain(
  { db, auth, address }: SignInContext,
  input: { email: string },
): Promise<void> {
  await countTry(db, 'mail', { account: input.email, address });
  // Without headers: the answer must not depend on who is signed in.
  await noSoonerThan(answerMs, () => auth.api.sendVerificationEmail({ body: { email: input.email } }));
}

/** Only a change of address answers with the user. */
const changeAnswer = z.object({ user: z.object({ id: z.string() }) });

/** Confirms an address by the token of its mail. Does not sign in: that takes the password. */
export async function verifyAddress(
  { db, auth, headers, requestId }: SignInContext,
  token: string,
): Promise<'verified' | 'changed'> {
  let changed: { id: string } | undefined;
  try {
    const answer: unknown = await auth.api.verifyEmail({ query: { token }, headers });
    const parsed = changeAnswer.safeParse(answer);
    if (parsed.success) changed = parsed.data.user;
  } catch (problem) {
    // Somebody else made an account with the new address since the mail was sent.
    if (isUniqueViolation(problem)) throw new AppError('link-not-valid');
    codeOf(problem);
    throw new AppError('link-not-valid');
  }
  if (!changed) return 'verified';
  await auditUser(db, changed.id, 'user.change-address', requestId);
  return 'changed';
}

/** Sends the mail with which a new password is chosen, if the address is known. */
export async function askPasswordReset(
  { db, auth, address }: SignInContext,
  input: { email: string },
): Promise<void> {
  await countTry(db, 'mail', { account: input.email, address });
  await noSoonerThan(answerMs, () => auth.api.requestPasswordReset({ body: { email: input.email } }));
}

/** Sets the new password by the token of the mail; every session of the account ends. */
export async function resetPassword(
  { db, auth, address, requestId }: SignInContext,
  input: { token: string; password: string },
): Promise<void> {
  await countTry(db, 'password', { address });
  requireGoodPassword(input.password, []);
  const context = await auth.$context;
  const held = await context.internalAdapter.findVerificationValue(`reset-password:${input.token}`);
  try {
    await auth.api.resetPassword({ body: { newPassword: input.password, token: input.token } });
  } catch (problem) {
    codeOf(problem);
    throw new AppError('link-not-valid');
  }
  if (!held) return;
  await transact(db, async (tx) => {
    const [row] = await tx.select().from(user).where(eq(user.id, held.value));
    if (!row) return;
    const by = await loadActor(tx, row.id, requestId);
    await audit(tx, by, { action: 'user.reset-password', subjectType: 'user', subjectId: row.id });
    await mailSecurityNotice(tx, row, 'password-changed');
  });
}

/** Ends the session of the cookie. */
export async function signOut({ auth, headers }: Pick<SignInContext, 'auth' | 'headers'>): Promise<void> {
  await auth.api.signOut({ headers });
}

/**
 * For commands and seeds: an account with a confirmed address, by the same rules. An existing one is
 * kept as it is. Returns the user's id.
 */
export async function createVerifiedPerson(
  db: Database,
  auth: Auth,
  input: { name: string; email: string; password: string },
): Promise<string> {
  const email = input.email.trim().toLowerCase();
  const find = async () => (await db.select({ id: user.id }).from(user).where(eq(user.email, email)))[0]?.id;
  const existing = await find();
  if (existing) return existing;
  requireGoodPassword(input.password, [input.name, email]);
  const context = await auth.$context;
  const hash = await context.password.hash(input.password);
  const created = await context.internalAdapter.createUser(
    { email, name: input.name, emailVerified: true },
    { method: 'email-password' },
  );
  await context.internalAdapter.linkAccount({
    userId: created.id,
    providerId: 'credential',
    accountId: created.id,
    password: hash,
  });
  return created.id;
}
