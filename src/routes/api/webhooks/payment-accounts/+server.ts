import { database } from '$lib/server/db/index.ts';
import { receiveAccountEvent } from '$lib/server/money/index.ts';
import { webhook } from '$lib/server/http/webhook.ts';
import type { RequestHandler } from './$types.ts';

/** Signed thin events about payout accounts: they name the account, whose state a job then fetches. */
export const POST: RequestHandler = webhook((body, signature) =>
  receiveAccountEvent(database(), body, signature),
);
