/**
 * The payment service as the product sees it. Every call that changes something takes an idempotency key that
 * its caller has stored first: the SDK's own random key would be lost with the process.
 */
import { Stripe } from 'stripe';
import type { z } from 'zod';
import { PaymentServiceError, toPaymentError } from './payment-errors.ts';
import type {
  CheckoutSessionInput,
  Keyed,
  Period,
  RecipientInput,
  RefundInput,
  TransferInput,
} from './payment-inputs.ts';
import {
  accountEventSchema,
  accountLinkSchema,
  accountSchema,
  balanceSchema,
  balanceTransactionSchema,
  chargeSchema,
  disputeSchema,
  eventSchema,
  refundSchema,
  reversalSchema,
  sessionSchema,
  transferSchema,
  type AccountEvent,
  type PaymentEvent,
} from './payment-schemas.ts';

export { PaymentServiceError, type PaymentErrorKind } from './payment-errors.ts';
export type * from './payment-inputs.ts';
export type * from './payment-schemas.ts';

export interface PaymentsConfig {
  secretKey: string;
  /** Origin of the API. */
  apiBase: string;
  webhookSecret: string;
  accountWebhookSecret: string;
  timeoutMs?: number;
  maxNetworkRetries?: number;
}

/** Signatures older than this are refused. */
const SIGNATURE_TOLERANCE_SECONDS = 300;

function clientFor(config: PaymentsConfig): Stripe {
  const base = new URL(config.apiBase);
  const https = base.protocol === 'https:';
  return new Stripe(config.secretKey, {
    host: base.hostname,
    port: base.port === '' ? (https ? 443 : 80) : Number(base.port),
    protocol: https ? 'https' : 'http',
    maxNetworkRetries: config.maxNetworkRetries ?? 2,
    timeout: config.timeoutMs ?? 20_000,
    telemetry: false,
  });
}

async function call<S extends z.ZodType>(schema: S, work: () => Promise<unknown>): Promise<z.output<S>> {
  try {
    return schema.parse(await work());
  } catch (error) {
    throw toPaymentError(error);
  }
}

async function* pages<S extends z.ZodType>(
  schema: S,
  rows: AsyncIterable<unknown>,
): AsyncGenerator<z.output<S>> {
  try {
    for await (const row of rows) yield schema.parse(row);
  } catch (error) {
    throw toPaymentError(error);
  }
}

async function collect<S extends z.ZodType>(schema: S, rows: AsyncIterable<unknown>): Promise<z.output<S>[]> {
  const found: z.output<S>[] = [];
  for await (const row of pages(schema, rows)) found.push(row);
  return found;
}

function created(period: Period): { created?: { gte?: number; lt?: number } } {
  if (period.from === undefined && period.to === undefined) return {};
  return {
    created: {
      ...(period.from === undefined ? {} : { gte: Math.floor(period.from / 1000) }),
      ...(period.to === undefined ? {} : { lt: Math.ceil(period.to / 1000) }),
    },
  };
}

const ACCOUNT_PARTS: Stripe.V2.Core.AccountRetrieveParams.Include[] = [
  'configuration.recipient',
  'requirements',
];

export type Payments = ReturnType<typeof createPayments>;

/** Amounts are integer minor units; currencies ISO 4217 in capitals; instants milliseconds UTC. */
export function createPayments(config: PaymentsConfig) {
  const stripe = clientFor(config);
  return {
    ...paymentCalls(stripe),
    ...moneyOutCalls(stripe),
    ...accountCalls(stripe),
    ...webhookCalls(stripe, config),
  };
}

function paymentCalls(stripe: Stripe) {
  return {
    createCheckoutSession: (input: CheckoutSessionInput) =>
      call(sessionSchema, () =>
        stripe.checkout.sessions.create(
          {
            mode: 'payment',
            ui_mode: 'hosted_page',
            line_items: input.lines.map((line) => ({
              quantity: line.quantity ?? 1,
              price_data: {
                currency: input.currency.toLowerCase(),
                unit_amount: line.unitAmount,
                product_data: {
                  name: line.name,
                  ...(line.description === undefined ? {} : { description: line.description }),
                },
              },
            })),
            success_url: input.successUrl,
            cancel_url: input.cancelUrl,
            client_reference_id: input.clientReferenceId,
            metadata: input.metadata,
            payment_intent_data: { metadata: input.metadata, transfer_group: input.transferGroup },
            ...(input.customerEmail === undefined ? {} : { customer_email: input.customerEmail }),
            ...(input.expiresAt === undefined ? {} : { expires_at: Math.floor(input.expiresAt / 1000) }),
          },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),

    /** With the charge's id, where there is one. */
    retrieveSession: (id: string) =>
      call(sessionSchema, () => stripe.checkout.sessions.retrieve(id, { expand: ['payment_intent'] })),

    /** Closes an open page. Throws `invalid` when it is no longer open. */
    expireSession: (id: string, { idempotencyKey }: Keyed) =>
      call(sessionSchema, () => stripe.checkout.sessions.expire(id, {}, { idempotencyKey })),

    listSessions: (period: Period = {}) =>
      pages(sessionSchema, stripe.checkout.sessions.list({ limit: 100, ...created(period) })),

    retrieveCharge: (id: string) =>
      call(chargeSchema, () => stripe.charges.retrieve(id, { expand: ['balance_transaction'] })),

    retrieveDispute: (id: string) => call(disputeSchema, () => stripe.disputes.retrieve(id)),

    retrieveBalance: () => call(balanceSchema, () => stripe.balance.retrieve()),

    /** Newest first. */
    listBalanceTransactions: (period: Period = {}) =>
      pages(balanceTransactionSchema, stripe.balanceTransactions.list({ limit: 100, ...created(period) })),
  };
}

function moneyOutCalls(stripe: Stripe) {
  return {
    createTransfer: (input: TransferInput) =>
      call(transferSchema, () =>
        stripe.transfers.create(
          {
            amount: input.amount,
            currency: input.currency.toLowerCase(),
            destination: input.destinationId,
            transfer_group: input.transferGroup,
            metadata: input.metadata,
            ...(input.sourceChargeId === undefined ? {} : { source_transaction: input.sourceChargeId }),
            ...(input.description === undefined ? {} : { description: input.description }),
          },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),

    retrieveTransfer: (id: string) => call(transferSchema, () => stripe.transfers.retrieve(id)),

    /** For looking up by metadata when a key may have been forgotten. */
    findTransfers: (transferGroup: string) =>
      collect(transferSchema, stripe.transfers.list({ limit: 100, transfer_group: transferGroup })),

    reverseTransfer: (
      input: Keyed & { transferId: string; amount: number; metadata: Record<string, string> },
    ) =>
      call(reversalSchema, () =>
        stripe.transfers.createReversal(
          input.transferId,
          { amount: input.amount, metadata: input.metadata },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),

    createRefund: (input: RefundInput) =>
      call(refundSchema, () =>
        stripe.refunds.create(
          {
            charge: input.chargeId,
            amount: input.amount,
            reason: 'requested_by_customer',
            metadata: input.metadata,
          },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),

    retrieveRefund: (id: string) => call(refundSchema, () => stripe.refunds.retrieve(id)),

    findRefunds: (chargeId: string) =>
      collect(refundSchema, stripe.refunds.list({ limit: 100, charge: chargeId })),
  };
}

function accountCalls(stripe: Stripe) {
  return {
    /** An account that can receive transfers once its holder has finished onboarding. */
    createAccount: (input: RecipientInput) =>
      call(accountSchema, () =>
        stripe.v2.core.accounts.create(
          {
            display_name: input.displayName,
            contact_email: input.contactEmail,
            dashboard: 'express',
            identity: { country: input.country, entity_type: 'company' },
            configuration: {
              recipient: { capabilities: { stripe_balance: { stripe_transfers: { requested: true } } } },
            },
            defaults: {
              responsibilities: { fees_collector: 'application', losses_collector: 'application' },
            },
            metadata: input.metadata,
            include: ACCOUNT_PARTS,
          },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),

    retrieveAccount: (id: string) =>
      call(accountSchema, () => stripe.v2.core.accounts.retrieve(id, { include: ACCOUNT_PARTS })),

    /** A link for one opening; the service sends people to `refreshUrl` when it was used or is too old. */
    createAccountLink: (input: Keyed & { accountId: string; refreshUrl: string; returnUrl: string }) =>
      call(accountLinkSchema, () =>
        stripe.v2.core.accountLinks.create(
          {
            account: input.accountId,
            use_case: {
              type: 'account_onboarding',
              account_onboarding: { refresh_url: input.refreshUrl, return_url: input.returnUrl },
            },
          },
          { idempotencyKey: input.idempotencyKey },
        ),
      ),
  };
}

function webhookCalls(stripe: Stripe, config: PaymentsConfig) {
  /** Verifies signature and age; the body has to be the bytes as they came. */
  function constructEvent(rawBody: string | Buffer, signature: string | null): PaymentEvent {
    let event: unknown;
    try {
      event = stripe.webhooks.constructEvent(
        rawBody,
        signature ?? '',
        config.webhookSecret,
        SIGNATURE_TOLERANCE_SECONDS,
      );
    } catch (error) {
      throw new PaymentServiceError('bad-signature', 'the webhook is not from the payment service', {
        cause: error,
      });
    }
    return eventSchema.parse(event);
  }

  /** A thin event about a connected account: names the account, whose state has to be fetched. */
  function parseAccountEvent(rawBody: string | Buffer, signature: string | null): AccountEvent {
    let event: unknown;
    try {
      event = stripe.parseEventNotification(
        rawBody,
        signature ?? '',
        config.accountWebhookSecret,
        SIGNATURE_TOLERANCE_SECONDS,
      );
    } catch (error) {
      throw new PaymentServiceError('bad-signature', 'the webhook is not from the payment service', {
        cause: error,
      });
    }
    return accountEventSchema.parse(event);
  }

  return {
    constructEvent,
    parseAccountEvent,
    /** Newest first, back to thirty days: what webhooks may have missed. */
    listEvents: (given: Period & { types?: string[] } = {}) =>
      pages(
        eventSchema,
        stripe.events.list({
          limit: 100,
          ...created(given),
          ...(given.types === undefined ? {} : { types: given.types }),
        }),
      ),
  };
}
