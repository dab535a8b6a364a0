import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { Stripe } from 'stripe';
import { z } from 'zod';

/** What the product wants to hear of payments. */
const PAYMENT_EVENTS: Stripe.WebhookEndpointCreateParams.EnabledEvent[] = [
  'checkout.session.completed',
  'checkout.session.expired',
  'checkout.session.async_payment_succeeded',
  'checkout.session.async_payment_failed',
  'payment_intent.payment_failed',
  'charge.refunded',
  'charge.dispute.created',
  'charge.dispute.updated',
  'charge.dispute.closed',
  'charge.dispute.funds_withdrawn',
  'charge.dispute.funds_reinstated',
  'refund.created',
  'refund.updated',
  'refund.failed',
  'transfer.created',
  'transfer.updated',
  'transfer.reversed',
];

/** And of the fabricators' accounts: thin events, each only names the account. */
const ACCOUNT_EVENTS = [
  'v2.core.account.updated',
  'v2.core.account.closed',
  'v2.core.account[requirements].updated',
  'v2.core.account[configuration.recipient].updated',
  'v2.core.account[configuration.recipient].capability_status_updated',
];

const secretsSchema = z.object({
  endpointId: z.string(),
  endpointSecret: z.string(),
  destinationId: z.string(),
  destinationSecret: z.string(),
});
export type WebhookSecrets = z.output<typeof secretsSchema>;

async function create(stripe: Stripe, origin: string): Promise<WebhookSecrets> {
  const endpoint = await stripe.webhookEndpoints.create({
    url: `${origin}/api/webhooks/payments`,
    enabled_events: PAYMENT_EVENTS,
  });
  const destination = await stripe.v2.core.eventDestinations.create({
    name: 'Accounts',
    type: 'webhook_endpoint',
    event_payload: 'thin',
    enabled_events: ACCOUNT_EVENTS,
    webhook_endpoint: { url: `${origin}/api/webhooks/payment-accounts` },
    include: ['webhook_endpoint.signing_secret'],
  });
  // The service tells secrets once, so they are kept beside the data they belong to.
  return secretsSchema.parse({
    endpointId: endpoint.id,
    endpointSecret: endpoint.secret,
    destinationId: destination.id,
    destinationSecret: destination.webhook_endpoint?.signing_secret,
  });
}

async function known(stripe: Stripe, kept: WebhookSecrets, origin: string): Promise<boolean> {
  try {
    await stripe.webhookEndpoints.update(kept.endpointId, {
      url: `${origin}/api/webhooks/payments`,
      enabled_events: PAYMENT_EVENTS,
    });
    await stripe.v2.core.eventDestinations.update(kept.destinationId, {
      enabled_events: ACCOUNT_EVENTS,
      webhook_endpoint: { url: `${origin}/api/webhooks/payment-accounts` },
    });
    return true;
  } catch (error) {
    if (error instanceof Stripe.errors.StripeError && error.statusCode === 404) return false;
    throw error;
  }
}

/** Registers both webhook addresses, or points the ones registered earlier to this origin. */
export async function registerWebhooks(given: {
  apiUrl: string;
  secretKey: string;
  origin: string;
  file: string;
}): Promise<WebhookSecrets> {
  const base = new URL(given.apiUrl);
  const stripe = new Stripe(given.secretKey, {
    host: base.hostname,
    port: Number(base.port),
    protocol: 'http',
    telemetry: false,
  });
  if (existsSync(given.file)) {
    const kept = secretsSchema.safeParse(JSON.parse(readFileSync(given.file, 'utf8')));
    if (kept.success && (await known(stripe, kept.data, given.origin))) return kept.data;
  }
  const secrets = await create(stripe, given.origin);
  writeFileSync(given.file, JSON.stringify(secrets, null, 2), { mode: 0o600 });
  return secrets;
}
