import { createOTP } from '@better-auth/utils/otp';
import { generateRandomString, symmetricEncrypt } from 'better-auth/crypto';
import { and, eq } from 'drizzle-orm';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { twoFactor, user } from '../db/schema/auth.ts';
import { membership } from '../db/schema/companies.ts';
import type { Auth } from './create.ts';

export class AdminError extends Error {}

/**
 * Makes a person an admin, or takes it back. Only by command on the server. Admins hold no membership,
 * so that nobody decides a dispute of their own company.
 */
export async function setAdmin(
  db: Database,
  email: string,
  isAdmin: boolean,
): Promise<{ userId: string; twoFactor: boolean }> {
  return transact(db, async (tx) => {
    const [row] = await tx.select().from(user).where(eq(user.email, email.trim().toLowerCase()));
    if (!row) throw new AdminError(`There is no account with the address ${email}.`);
    if (isAdmin && !row.emailVerified) throw new AdminError(`The address ${email} is not confirmed yet.`);
    const [member] = await tx
      .select({ id: membership.id })
      .from(membership)
      .where(and(eq(membership.userId, row.id), eq(membership.active, true)));
    if (isAdmin && member)
      throw new AdminError('Members of a company cannot be admins; use another account.');
    await tx.update(user).set({ isAdmin, updatedAt: new Date() }).where(eq(user.id, row.id));
    await audit(tx, 'system', {
      action: isAdmin ? 'user.make-admin' : 'user.revoke-admin',
      subjectType: 'user',
      subjectId: row.id,
    });
    return { userId: row.id, twoFactor: row.twoFactorEnabled ?? false };
  });
}

/**
 * For commands and the seed: gives an account a second factor at once and returns what the authenticator
 * needs. An existing one is replaced.
 */
export async function enrolSecondFactor(
  db: Database,
  auth: Auth,
  userId: string,
): Promise<{ uri: string; secret: string; backupCodes: string[] }> {
  const [row] = await db.select().from(user).where(eq(user.id, userId));
  if (!row) throw new AdminError(`There is no user ${userId}.`);
  const { secretConfig: key } = await auth.$context;
  const secret = generateRandomString(32);
  const backupCodes = Array.from({ length: 10 }, () => {
    const code = generateRandomString(10, 'a-z', '0-9');
    return `${code.slice(0, 5)}-${code.slice(5)}`;
  });
  const sealed = {
    secret: await symmetricEncrypt({ key, data: secret }),
    backupCodes: await symmetricEncrypt({ key, data: JSON.stringify(backupCodes) }),
  };
  await transact(db, async (tx) => {
    await tx.delete(twoFactor).where(eq(twoFactor.userId, userId));
    await tx.insert(twoFactor).values({ id: newId(), userId, ...sealed, verified: true });
    await tx.update(user).set({ twoFactorEnabled: true, updatedAt: new Date() }).where(eq(user.id, userId));
    await audit(tx, 'system', { action: 'user.two-factor-on', subjectType: 'user', subjectId: userId });
  });
  const uri = createOTP(secret, { digits: 6 }).url('Coilyard', row.email);
  return { uri, secret: new URL(uri).searchParams.get('secret') ?? '', backupCodes };
}
