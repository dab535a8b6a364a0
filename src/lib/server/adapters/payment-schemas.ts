/** What we read of the payment service's answers, in our own names. Amounts are integer minor units. */
import { z } from 'zod';
import { currencies } from '../../domain/money.ts';

/** The service writes currencies small; the product writes them as in ISO 4217. */
export const currency = z
  .string()
  .transform((value) => value.toUpperCase())
  .pipe(z.enum(currencies));
const amount = z.number().int();
/** Seconds on the wire, milliseconds inside. */
const instant = z.number().transform((seconds) => seconds * 1000);
/** An id, or the expanded object. */
const reference = z.union([z.string(), z.object({ id: z.string() }).transform((object) => object.id)]);
const metadata = z.record(z.string(), z.string());

export const balanceTransactionSchema = z
  .object({
    id: z.string(),
    type: z.string(),
    reporting_category: z.string(),
    amount,
    fee: amount,
    net: amount,
    currency,
    source: reference.nullable(),
    status: z.string(),
    created: instant,
    available_on: instant,
  })
  .transform((row) => ({
    id: row.id,
    type: row.type,
    category: row.reporting_category,
    amount: row.amount,
    fee: row.fee,
    net: row.net,
    currency: row.currency,
    sourceId: row.source,
    available: row.status === 'available',
    createdAt: row.created,
    availableAt: row.available_on,
  }));
export type BalanceTransaction = z.output<typeof balanceTransactionSchema>;

const intentPart = z.object({ id: z.string(), status: z.string(), latest_charge: reference.nullable() });

export const sessionSchema = z
  .object({
    id: z.string(),
    url: z.url().nullable(),
    status: z.enum(['open', 'complete', 'expired']),
    payment_status: z.enum(['paid', 'unpaid', 'no_payment_required']),
    amount_total: amount,
    currency,
    client_reference_id: z.string().nullable(),
    payment_intent: z.union([z.string(), intentPart]).nullable(),
    metadata: metadata.nullable(),
    created: instant,
    expires_at: instant,
  })
  .transform((row) => {
    const intent = typeof row.payment_intent === 'object' ? row.payment_intent : null;
    return {
      id: row.id,
      url: row.url,
      status: row.status,
      paymentStatus: row.payment_status,
      amount: row.amount_total,
      currency: row.currency,
      clientReferenceId: row.client_reference_id,
      paymentIntentId: intent?.id ?? (typeof row.payment_intent === 'string' ? row.payment_intent : null),
      /** Known only where the payment intent was expanded. */
      chargeId: intent?.latest_charge ?? null,
      metadata: row.metadata ?? {},
      createdAt: row.created,
      expiresAt: row.expires_at,
    };
  });
export type CheckoutSession = z.output<typeof sessionSchema>;

export const chargeSchema = z
  .object({
    id: z.string(),
    status: z.enum(['succeeded', 'pending', 'failed']),
    amount,
    amount_refunded: amount,
    currency,
    disputed: z.boolean(),
    refunded: z.boolean(),
    payment_intent: reference.nullable(),
    balance_transaction: z.union([z.string().transform(() => null), balanceTransactionSchema]).nullable(),
    transfer_group: z.string().nullable(),
    failure_code: z.string().nullable(),
    metadata,
  })
  .transform((row) => ({
    id: row.id,
    status: row.status,
    amount: row.amount,
    amountRefunded: row.amount_refunded,
    currency: row.currency,
    disputed: row.disputed,
    refunded: row.refunded,
    paymentIntentId: row.payment_intent,
    balanceTransaction: row.balance_transaction,
    transferGroup: row.transfer_group,
    failureCode: row.failure_code,
    metadata: row.metadata,
  }));
export type Charge = z.output<typeof chargeSchema>;

export const transferSchema = z
  .object({
    id: z.string(),
    amount,
    amount_reversed: amount,
    currency,
    destination: reference.nullable(),
    source_transaction: reference.nullable(),
    balance_transaction: reference.nullable(),
    transfer_group: z.string().nullable(),
    created: instant,
    metadata,
  })
  .transform((row) => ({
    id: row.id,
    amount: row.amount,
    amountReversed: row.amount_reversed,
    currency: row.currency,
    destinationId: row.destination,
    sourceChargeId: row.source_transaction,
    balanceTransactionId: row.balance_transaction,
    transferGroup: row.transfer_group,
    createdAt: row.created,
    metadata: row.metadata,
  }));
export type Transfer = z.output<typeof transferSchema>;

export const reversalSchema = z
  .object({
    id: z.string(),
    amount,
    currency,
    transfer: reference,
    balance_transaction: reference.nullable(),
  })
  .transform((row) => ({
    id: row.id,
    amount: row.amount,
    currency: row.currency,
    transferId: row.transfer,
    balanceTransactionId: row.balance_transaction,
  }));
export type TransferReversal = z.output<typeof reversalSchema>;

export const refundSchema = z
  .object({
    id: z.string(),
    status: z.enum(['pending', 'requires_action', 'succeeded', 'failed', 'canceled']),
    amount,
    currency,
    charge: reference.nullable(),
    payment_intent: reference.nullable(),
    balance_transaction: reference.nullable(),
    failure_balance_transaction: reference.optional(),
    failure_reason: z.string().optional(),
    pending_reason: z.string().optional(),
    created: instant,
    metadata: metadata.nullable(),
  })
  .transform((row) => ({
    id: row.id,
    status: row.status,
    amount: row.amount,
    currency: row.currency,
    chargeId: row.charge,
    paymentIntentId: row.payment_intent,
    balanceTransactionId: row.balance_transaction,
    failureBalanceTransactionId: row.failure_balance_transaction ?? null,
    failureReason: row.failure_reason ?? null,
    pendingReason: row.pending_reason ?? null,
    createdAt: row.created,
    metadata: row.metadata ?? {},
  }));
export type Refund = z.output<typeof refundSchema>;

export const disputeSchema = z
  .object({
    id: z.string(),
    status: z.string(),
    reason: z.string(),
    amount,
    currency,
    charge: reference,
    created: instant,
    evidence_details: z.object({ due_by: z.number().nullable() }),
    balance_transactions: z.array(balanceTransactionSchema),
  })
  .transform((row) => ({
    id: row.id,
    status: row.status,
    reason: row.reason,
    amount: row.amount,
    currency: row.currency,
    chargeId: row.charge,
    createdAt: row.created,
    evidenceDueAt: row.evidence_details.due_by === null ? null : row.evidence_details.due_by * 1000,
    balanceTransactions: row.balance_transactions,
  }));
export type Dispute = z.output<typeof disputeSchema>;

const transferCapability = z.object({
  status: z.enum(['active', 'pending', 'rejected', 'restricted', 'unsupported']),
});

export const accountSchema = z
  .object({
    id: z.string(),
    closed: z.boolean().optional(),
    display_name: z.string().optional(),
    contact_email: z.string().optional(),
    metadata: metadata.optional(),
    configuration: z
      .object({
        recipient: z
          .object({
            capabilities: z
              .object({
                stripe_balance: z.object({ stripe_transfers: transferCapability.optional() }).optional(),
              })
              .optional(),
          })
          .optional(),
      })
      .optional(),
    requirements: z
      .object({
        entries: z.array(z.object({ description: z.string(), awaiting_action_from: z.string() })).optional(),
      })
      .optional(),
  })
  .transform((row) => {
    const transfers = row.configuration?.recipient?.capabilities?.stripe_balance?.stripe_transfers?.status;
    return {
      id: row.id,
      closed: row.closed ?? false,
      displayName: row.display_name ?? null,
      contactEmail: row.contact_email ?? null,
      transfers: transfers ?? ('not-requested' as const),
      /** Whether a transfer would be taken now. */
      canReceive: transfers === 'active' && row.closed !== true,
      /** What the account's holder still has to provide. */
      needs: (row.requirements?.entries ?? [])
        .filter((entry) => entry.awaiting_action_from === 'user')
        .map((entry) => entry.description),
      metadata: row.metadata ?? {},
    };
  });
export type PayeeAccount = z.output<typeof accountSchema>;

export const accountLinkSchema = z
  .object({ url: z.url(), expires_at: z.string().transform((text) => Date.parse(text)) })
  .transform((row) => ({ url: row.url, expiresAt: row.expires_at }));
export type AccountLink = z.output<typeof accountLinkSchema>;

const money = z.object({ amount, currency });
export const balanceSchema = z.object({ available: z.array(money), pending: z.array(money) });
export type Balance = z.output<typeof balanceSchema>;

export const eventSchema = z
  .object({
    id: z.string(),
    type: z.string(),
    created: instant,
    livemode: z.boolean(),
    data: z.object({ object: z.looseObject({ object: z.string(), id: z.string().optional() }) }),
  })
  .transform((row) => ({
    id: row.id,
    type: row.type,
    createdAt: row.created,
    livemode: row.livemode,
    objectType: row.data.object.object,
    objectId: row.data.object.id ?? null,
    /** The object as it was when the event was made; it may have changed since. */
    snapshot: row.data.object as Record<string, unknown>,
  }));
export type PaymentEvent = z.output<typeof eventSchema>;

export const accountEventSchema = z
  .object({
    id: z.string(),
    type: z.string(),
    created: z.string().transform((text) => Date.parse(text)),
    related_object: z.object({ id: z.string(), type: z.string() }).nullish(),
  })
  .transform((row) => ({
    id: row.id,
    type: row.type,
    createdAt: row.created,
    accountId: row.related_object?.type === 'v2.core.account' ? row.related_object.id : null,
  }));
export type AccountEvent = z.output<typeof accountEventSchema>;
