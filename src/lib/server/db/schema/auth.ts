import { index, integer, sqliteTable, text } from 'drizzle-orm/sqlite-core';
import { flag } from './columns.ts';

// The tables of better-auth, in the shape its schema command gives. Own fields of the user follow at the end.
const date = (name: string) => integer(name, { mode: 'timestamp_ms' });

export const user = sqliteTable('user', {
  id: text('id').primaryKey(),
  name: text('name').notNull(),
  email: text('email').notNull().unique(),
  emailVerified: flag('email_verified').notNull().default(false),
  image: text('image'),
  createdAt: date('created_at').notNull(),
  updatedAt: date('updated_at').notNull(),
  twoFactorEnabled: flag('two_factor_enabled').default(false),
  isAdmin: flag('is_admin').notNull().default(false),
  /** IANA zone and unit set of the person. */
  timeZone: text('time_zone').notNull().default('Europe/Berlin'),
  unitSet: text('unit_set', { enum: ['metric', 'inch'] })
    .notNull()
    .default('metric'),
});

export const session = sqliteTable(
  'session',
  {
    id: text('id').primaryKey(),
    expiresAt: date('expires_at').notNull(),
    token: text('token').notNull().unique(),
    createdAt: date('created_at').notNull(),
    updatedAt: date('updated_at').notNull(),
    ipAddress: text('ip_address'),
    userAgent: text('user_agent'),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'cascade' }),
    /**
     * Own field: until then money and security steps need no new password. Moves on with use, lapses
     * after 30 idle minutes, and is set again only by entering the password.
     */
    freshUntil: date('fresh_until').notNull(),
  },
  (table) => [index('session_user').on(table.userId)],
);

export const account = sqliteTable(
  'account',
  {
    id: text('id').primaryKey(),
    accountId: text('account_id').notNull(),
    providerId: text('provider_id').notNull(),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'cascade' }),
    accessToken: text('access_token'),
    refreshToken: text('refresh_token'),
    idToken: text('id_token'),
    accessTokenExpiresAt: date('access_token_expires_at'),
    refreshTokenExpiresAt: date('refresh_token_expires_at'),
    scope: text('scope'),
    password: text('password'),
    createdAt: date('created_at').notNull(),
    updatedAt: date('updated_at').notNull(),
  },
  (table) => [index('account_user').on(table.userId)],
);

export const verification = sqliteTable(
  'verification',
  {
    id: text('id').primaryKey(),
    identifier: text('identifier').notNull(),
    value: text('value').notNull(),
    expiresAt: date('expires_at').notNull(),
    createdAt: date('created_at').notNull(),
    updatedAt: date('updated_at').notNull(),
  },
  (table) => [index('verification_identifier').on(table.identifier)],
);

export const twoFactor = sqliteTable(
  'two_factor',
  {
    id: text('id').primaryKey(),
    secret: text('secret').notNull(),
    backupCodes: text('backup_codes').notNull(),
    userId: text('user_id')
      .notNull()
      .references(() => user.id, { onDelete: 'cascade' }),
    verified: flag('verified').default(true),
    failedVerificationCount: integer('failed_verification_count').default(0),
    lockedUntil: date('locked_until'),
  },
  (table) => [index('two_factor_user').on(table.userId), index('two_factor_secret').on(table.secret)],
);
