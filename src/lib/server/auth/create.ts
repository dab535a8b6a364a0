import { betterAuth, type BetterAuthPlugin } from 'better-auth';
import { drizzleAdapter } from 'better-auth/adapters/drizzle';
import { twoFactor as twoFactorPlugin } from 'better-auth/plugins/two-factor';
import { hourMs, dayMs } from '../../domain/dates.ts';
import { newId } from '../adapters/ids.ts';
import type { Config } from '../config/index.ts';
import type { Database } from '../db/index.ts';
import { account, session, twoFactor, user, verification } from '../db/schema/auth.ts';
import { log } from '../log/index.ts';
import { mailAddressTaken, mailReset, mailVerify } from './mails.ts';
import { passwordLength } from './password.ts';

/** `__Host-`: only ever set by this host, over https or on localhost, for every path. */
export const sessionCookie = '__Host-coilyard';

export const sessionLimits = {
  /** A session that is not used for so long ends. */
  idleMs: 24 * hourMs,
  /** However much it is used, it ends after this. */
  absoluteMs: 14 * dayMs,
  /** Money and security steps ask for the password again after so long without use. */
  freshMs: hourMs / 2,
} as const;

export const tokenMinutes = 60;

const seconds = (ms: number) => Math.round(ms / 1000);

interface AuthOptions {
  db: Database;
  config: Pick<Config, 'origin' | 'auth'>;
  /** The web application gives its cookie plugin here; commands and tests give none. */
  plugins?: BetterAuthPlugin[];
}

/**
 * Sign-in by better-auth: users, sessions, passwords, single-use tokens and second factors, nothing of
 * the application. Its own HTTP handler is not mounted: pages call `auth.api` from their actions, so that
 * every way in goes through our limits, password rule and audit (`flows.ts`, `account.ts`).
 */
export function createAuth({ db, config, plugins = [] }: AuthOptions) {
  return betterAuth({
    appName: 'Coilyard',
    baseURL: config.origin,
    secret: config.auth.secret,
    telemetry: { enabled: false },
    database: drizzleAdapter(db, {
      provider: 'sqlite',
      schema: { user, session, account, verification, twoFactor },
    }),
    emailAndPassword: {
      enabled: true,
      minPasswordLength: passwordLength.min,
      maxPasswordLength: passwordLength.max * 2, // code units; our rule counts characters
      requireEmailVerification: true,
      revokeSessionsOnPasswordReset: true,
      resetPasswordTokenExpiresIn: tokenMinutes * 60,
      sendResetPassword: ({ user: to, token }) => mailReset(db, to, token),
      onExistingUserSignUp: ({ user: to }) => mailAddressTaken(db, to),
    },
    emailVerification: {
      sendOnSignUp: true,
      sendOnSignIn: true,
      expiresIn: tokenMinutes * 60,
      sendVerificationEmail: ({ user: to, token }) => mailVerify(db, to, token),
    },
    user: {
      changeEmail: { enabled: true },
      additionalFields: {
        isAdmin: { type: 'boolean', required: false, input: false, defaultValue: false },
        timeZone: { type: 'string', required: false, input: false, defaultValue: 'Europe/Berlin' },
        unitSet: { type: 'string', required: false, input: false, defaultValue: 'metric' },
      },
    },
    session: {
      expiresIn: seconds(sessionLimits.idleMs),
      updateAge: seconds(hourMs / 4),
      cookieCache: { enabled: false },
      additionalFields: {
        freshUntil: {
          type: 'date',
          required: false,
          input: false,
          defaultValue: () => new Date(Date.now() + sessionLimits.freshMs),
        },
      },
    },
    // What the mail carries is not what the table holds.
    verification: { storeIdentifier: 'hashed' },
    // Applies to the unmounted handler only; the counts that matter are in `limits.ts`.
    rateLimit: { enabled: false },
    advanced: {
      database: { generateId: () => newId() },
      ipAddress: { ipAddressHeaders: ['x-client-ip'] },
      useSecureCookies: false,
      cookiePrefix: '__Host-coilyard',
      defaultCookieAttributes: { secure: true, sameSite: 'lax', path: '/', httpOnly: true },
      cookies: { session_token: { name: sessionCookie } },
    },
    logger: {
      log: (level, message) => {
        // Its texts may name addresses: the level and nothing else is kept of them, except errors' own.
        if (level === 'error') log().error({ source: 'sign-in' }, message.replace(/\S+@\S+/g, '[address]'));
      },
    },
    plugins: [
      twoFactorPlugin({
        issuer: 'Coilyard',
        twoFactorCookieMaxAge: 600,
        trustDeviceMaxAge: seconds(sessionLimits.absoluteMs),
        accountLockout: { enabled: true, maxFailedAttempts: 10, durationSeconds: 900 },
      }),
      ...(plugins as []),
    ],
  });
}

export type Auth = ReturnType<typeof createAuth>;
