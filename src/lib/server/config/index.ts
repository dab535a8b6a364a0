import { hkdfSync } from 'node:crypto';
import path from 'node:path';
import { z } from 'zod';

/** The only reader of the environment. Every default is one that the demo can run on. */
const port = z.coerce.number().int().min(1).max(65535);

const environment = z.object({
  COILYARD_MODE: z.enum(['demo', 'test', 'production']).default('demo'),
  ORIGIN: z.url().default('http://localhost:3000'),
  DATABASE_URL: z.string().min(1).default('file:.data/coilyard.db'),
  DATABASE_AUTH_TOKEN: z.string().optional(),
  MIGRATIONS_DIR: z.string().default('drizzle'),
  AUTH_SECRET: z
    .string()
    .min(32, 'needs 32 characters or more')
    .default('demo-only-secret-never-in-production-0000'),
  STRIPE_SECRET_KEY: z.string().min(8).default('sk_test_coilyard_demo'),
  STRIPE_API_BASE: z.url().default('http://127.0.0.1:4010'),
  STRIPE_WEBHOOK_SECRET: z.string().min(8).default('whsec_coilyard_demo_payments'),
  STRIPE_ACCOUNT_WEBHOOK_SECRET: z.string().min(8).default('whsec_coilyard_demo_accounts'),
  PAYMENT_PAGE_ORIGIN: z.url().default('http://127.0.0.1:4010'),
  S3_ENDPOINT: z.url().default('http://127.0.0.1:4020'),
  S3_PUBLIC_ENDPOINT: z.url().default('http://127.0.0.1:4020'),
  S3_BUCKET: z.string().min(3).default('coilyard'),
  S3_REGION: z.string().default('eu-central-1'),
  S3_ACCESS_KEY_ID: z.string().min(3).default('COILYARDDEMOKEY'),
  S3_SECRET_ACCESS_KEY: z.string().min(8).default('coilyard-demo-object-store-secret'),
  SMTP_HOST: z.string().default('127.0.0.1'),
  SMTP_PORT: port.default(4030),
  SMTP_SECURE: z.enum(['true', 'false']).default('false'),
  SMTP_USER: z.string().optional(),
  SMTP_PASSWORD: z.string().optional(),
  MAIL_FROM: z.string().default('Coilyard <post@coilyard.example>'),
  MAIL_PAGE_URL: z.string().optional(),
  TRUSTED_PROXY_HOPS: z.coerce.number().int().min(0).max(10).default(0),
  PUBLIC_CHECKS_PER_MINUTE: z.coerce.number().int().min(1).max(100_000).optional(),
  SIGN_IN_ATTEMPTS_PER_QUARTER_HOUR: z.coerce.number().int().min(1).max(100_000).optional(),
  SOLVE_THREAD: z.string().optional(),
  DATA_DIR: z.string().default('.data'),
  LOG_LEVEL: z.enum(['silent', 'error', 'warn', 'info', 'debug']).default('info'),
});

export type Mode = 'demo' | 'test' | 'production';

const demoSecrets = [
  'AUTH_SECRET',
  'STRIPE_SECRET_KEY',
  'STRIPE_WEBHOOK_SECRET',
  'STRIPE_ACCOUNT_WEBHOOK_SECRET',
  'S3_SECRET_ACCESS_KEY',
] as const;

export class ConfigError extends Error {}

export type Config = ReturnType<typeof loadConfig>;

/** Parses the environment; throws ConfigError with one line per wrong value. */
export function loadConfig(env: Record<string, string | undefined>) {
  const given = Object.fromEntries(Object.entries(env).filter(([, value]) => value !== ''));
  const parsed = environment.safeParse(given);
  if (!parsed.success) {
    const lines = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
    throw new ConfigError(`Wrong configuration:\n  ${lines.join('\n  ')}`);
  }
  const values = parsed.data;
  if (values.COILYARD_MODE === 'production') {
    const missing = demoSecrets.filter((name) => given[name] === undefined);
    if (missing.length > 0) {
      throw new ConfigError(`Wrong configuration:\n  production needs its own ${missing.join(', ')}`);
    }
  }
  return {
    mode: values.COILYARD_MODE as Mode,
    origin: values.ORIGIN.replace(/\/$/, ''),
    dataDir: path.resolve(values.DATA_DIR),
    logLevel: values.LOG_LEVEL,
    trustedProxyHops: values.TRUSTED_PROXY_HOPS,
    database: {
      url: values.DATABASE_URL,
      authToken: values.DATABASE_AUTH_TOKEN,
      migrationsDir: path.resolve(values.MIGRATIONS_DIR),
    },
    auth: { secret: values.AUTH_SECRET },
    /** Key for mail bodies that carry a single-use token, derived so that one secret is enough. */
    mailKey: Buffer.from(hkdfSync('sha256', values.AUTH_SECRET, 'coilyard', 'outbox-mail-body', 32)),
    payments: {
      secretKey: values.STRIPE_SECRET_KEY,
      apiBase: values.STRIPE_API_BASE,
      webhookSecret: values.STRIPE_WEBHOOK_SECRET,
      accountWebhookSecret: values.STRIPE_ACCOUNT_WEBHOOK_SECRET,
      pageOrigin: new URL(values.PAYMENT_PAGE_ORIGIN).origin,
    },
    storage: {
      endpoint: values.S3_ENDPOINT,
      publicEndpoint: values.S3_PUBLIC_ENDPOINT,
      publicOrigin: new URL(values.S3_PUBLIC_ENDPOINT).origin,
      bucket: values.S3_BUCKET,
      region: values.S3_REGION,
      accessKeyId: values.S3_ACCESS_KEY_ID,
      secretAccessKey: values.S3_SECRET_ACCESS_KEY,
    },
    mail: {
      host: values.SMTP_HOST,
      port: values.SMTP_PORT,
      secure: values.SMTP_SECURE === 'true',
      user: values.SMTP_USER,
      password: values.SMTP_PASSWORD,
      from: values.MAIL_FROM,
      pageUrl: values.MAIL_PAGE_URL,
    },
    limits: {
      publicChecksPerMinute:
        values.PUBLIC_CHECKS_PER_MINUTE ?? (values.COILYARD_MODE === 'production' ? 30 : 600),
      signInAttemptsPerQuarterHour:
        values.SIGN_IN_ATTEMPTS_PER_QUARTER_HOUR ?? (values.COILYARD_MODE === 'production' ? 10 : 200),
    },
    solveThread: values.SOLVE_THREAD,
  };
}

let loaded: Config | undefined;

/** The configuration of this process, parsed at first use. */
export function config(): Config {
  loaded ??= loadConfig(process.env);
  return loaded;
}
