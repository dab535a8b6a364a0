import { asc } from 'drizzle-orm';
import { realNow } from '../adapters/clock.ts';
import { createMailer } from '../adapters/mailer.ts';
import { config } from '../config/index.ts';
import type { Database } from '../db/index.ts';
import { serviceProbe } from '../db/schema/platform.ts';
import { objectStore } from '../files/index.ts';
import { log } from '../log/index.ts';
import { paymentService } from '../money/index.ts';

/** One outside service and how to ask whether it answers. Throws when it does not. */
export interface Probe {
  name: string;
  ask: () => Promise<string>;
}

const limitMs = 5_000;
/** The drain of tests and seeds runs recurring work round after round; the services are not asked each time. */
const freshMs = 25_000;

/** Asks the real services in the cheapest way that proves that credentials and network are right. */
export function serviceProbes(): Probe[] {
  return [
    {
      name: 'payments',
      ask: async () => {
        await paymentService().retrieveBalance();
        return 'The payment service answers.';
      },
    },
    {
      name: 'storage',
      ask: async () => {
        // An object that never exists: a signed "not there" proves bucket, network and credentials.
        await objectStore().head('probe');
        return 'The object store answers.';
      },
    },
    {
      name: 'mail',
      ask: async () => {
        const mailer = createMailer(config().mail);
        try {
          await mailer.check();
        } finally {
          mailer.close();
        }
        return 'The mail server takes mail.';
      },
    },
  ];
}

async function within<T>(work: Promise<T>): Promise<T> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error(`no answer within ${limitMs / 1000} s`)), limitMs);
  });
  try {
    return await Promise.race([work, late]);
  } finally {
    clearTimeout(timer);
  }
}

/** Asks each service once and keeps the answer; a service that does not answer is a row, not an error. */
export async function probeServices(db: Database, probes: Probe[] = serviceProbes()): Promise<void> {
  const last = await db.select({ at: serviceProbe.at }).from(serviceProbe).orderBy(asc(serviceProbe.at));
  const oldest = last[0]?.at ?? 0;
  if (last.length >= probes.length && realNow() - oldest < freshMs) return;
  const results = await Promise.all(
    probes.map(async ({ name, ask }) => {
      try {
        return { name, ok: true, detail: await within(ask()), at: realNow() };
      } catch (error) {
        const detail = (error instanceof Error ? error.message : String(error)).slice(0, 300);
        log().warn({ service: name, error: detail }, 'service does not answer');
        return { name, ok: false, detail, at: realNow() };
      }
    }),
  );
  for (const result of results) {
    await db
      .insert(serviceProbe)
      .values(result)
      .onConflictDoUpdate({ target: serviceProbe.name, set: result });
  }
}
