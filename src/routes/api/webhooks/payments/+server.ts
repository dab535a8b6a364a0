import { database } from '$lib/server/db/index.ts';
import { receivePaymentEvent } from '$lib/server/money/index.ts';
import { webhook } from '$lib/server/http/webhook.ts';
import type { RequestHandler } from './$types.ts';

/** Signed events of the payment service: stored by id, answered at once, processed by a job. */
export const POST: RequestHandler = webhook((body, signature) =>
  receivePaymentEvent(database(), body, signature),
);
