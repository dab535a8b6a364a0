import { existsSync } from 'node:fs';
import path from 'node:path';
import { startMailServer, type RunningMailServer } from '../../../fake-services/mail/server.ts';
import { startObjectStore, type RunningObjectStore } from '../../../fake-services/s3/server.ts';
import { startPaymentService, type RunningPaymentService } from '../../../fake-services/stripe/server.ts';
import type { Closers } from './lock.ts';
import type { StackPorts } from './ports.ts';
import type { WebhookSecrets } from './webhooks.ts';

export const SECRET_KEY = 'sk_test_coilyard_demo';
const STORE = {
  region: 'eu-central-1',
  accessKeyId: 'COILYARDDEMOKEY',
  secretAccessKey: 'coilyard-demo-object-store-secret',
};
const BUCKET = 'coilyard';

export interface Services {
  payments: RunningPaymentService;
  objects: RunningObjectStore;
  mail: RunningMailServer;
}

/** Starts the stand-ins of the outside services. */
export async function startServices(
  dataDir: string,
  ports: StackPorts,
  origin: string,
  onStop: Closers,
): Promise<Services> {
  const payments = await startPaymentService({
    port: ports.payments,
    dataDir: path.join(dataDir, 'payments'),
    apiKey: SECRET_KEY,
  });
  onStop.add(() => payments.close());
  const objects = await startObjectStore({
    port: ports.objects,
    dataDir: path.join(dataDir, 'objects'),
    credentials: STORE,
    buckets: [BUCKET],
    corsOrigins: [origin],
  });
  onStop.add(() => objects.close());
  const mail = await startMailServer({
    smtpPort: ports.smtp,
    webPort: ports.mailPage,
    dataDir: path.join(dataDir, 'mail'),
  });
  onStop.add(() => mail.close());
  return { payments, objects, mail };
}

interface Surroundings {
  mode: 'demo' | 'test';
  dataDir: string;
  migrationsDir: string;
  build: string;
  origin: string;
  ports: StackPorts;
  services: Services;
  secrets: WebhookSecrets;
  extra: Record<string, string> | undefined;
}

/** The environment of application, worker and commands: nothing of ours leaks in but the machine's own. */
export function environment(given: Surroundings): Record<string, string> {
  const inherited = Object.fromEntries(
    ['PATH', 'HOME', 'TMPDIR', 'TZ', 'LANG', 'NODE_EXTRA_CA_CERTS'].flatMap((name) => {
      const value = process.env[name];
      return value === undefined ? [] : [[name, value]];
    }),
  );
  const thread = path.join(given.build, 'node/solve-thread.js');
  return {
    ...inherited,
    NODE_ENV: 'production',
    COILYARD_MODE: given.mode,
    HOST: '127.0.0.1',
    PORT: String(given.ports.app),
    ORIGIN: given.origin,
    DATA_DIR: given.dataDir,
    DATABASE_URL: `file:${path.join(given.dataDir, 'coilyard.db')}`,
    MIGRATIONS_DIR: given.migrationsDir,
    STRIPE_SECRET_KEY: SECRET_KEY,
    STRIPE_API_BASE: given.services.payments.url,
    PAYMENT_PAGE_ORIGIN: given.services.payments.url,
    STRIPE_WEBHOOK_SECRET: given.secrets.endpointSecret,
    STRIPE_ACCOUNT_WEBHOOK_SECRET: given.secrets.destinationSecret,
    S3_ENDPOINT: given.services.objects.url,
    S3_PUBLIC_ENDPOINT: given.services.objects.url,
    S3_BUCKET: BUCKET,
    S3_REGION: STORE.region,
    S3_ACCESS_KEY_ID: STORE.accessKeyId,
    S3_SECRET_ACCESS_KEY: STORE.secretAccessKey,
    SMTP_HOST: '127.0.0.1',
    SMTP_PORT: String(given.ports.smtp),
    MAIL_PAGE_URL: given.services.mail.url,
    LOG_LEVEL: process.env['LOG_LEVEL'] ?? 'info',
    AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
    ...(existsSync(thread) ? { SOLVE_THREAD: thread } : {}),
    ...given.extra,
  };
}
