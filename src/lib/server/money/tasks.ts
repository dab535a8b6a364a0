import { PaymentServiceError } from '../adapters/payments.ts';
import type { Database } from '../db/index.ts';
import { log } from '../log/index.ts';
import { backfillEvents, retryLeftEvents } from './events.ts';
import { recoverOperations } from './execute.ts';

/** Run at start and again and again: finishes or looks up unfinished calls, and fetches missed events. */
export async function recoverMoney(db: Database, signal: AbortSignal): Promise<void> {
  await recoverOperations(db, { signal });
  try {
    await backfillEvents(db, { everyMs: 60_000, signal });
  } catch (error) {
    // The service is down; the next run asks again from the same place.
    if (!(error instanceof PaymentServiceError)) throw error;
    log().warn({ error: error.kind }, 'events could not be fetched');
  }
  await retryLeftEvents(db);
}
