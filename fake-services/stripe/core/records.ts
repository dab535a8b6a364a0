/** What the stand-in keeps: the service's own objects, and beside them what only the service knows. */
import type { Stripe } from 'stripe';
import type { CardBehaviour } from '../cards.ts';

export interface SessionRecord {
  object: Stripe.Checkout.Session;
  lineItems: { description: string; quantity: number; unitAmount: number; detail: string | null }[];
  intent: {
    description: string | null;
    metadata: Record<string, string>;
    transferGroup: string | null;
    receiptEmail: string | null;
    statementDescriptorSuffix: string | null;
  };
  submitMessage: string | null;
}

export interface IntentRecord {
  object: Stripe.PaymentIntent;
  session: string | null;
  /** The card that waits for the holder's confirmation. */
  pendingCard: CardBehaviour | null;
}

export interface ChargeRecord {
  object: Stripe.Charge;
  behaviour: CardBehaviour;
  /** Seconds at which a bank debit becomes known, null for cards. */
  settlesAt: number | null;
}

export interface RefundRecord {
  object: Stripe.Refund;
  settlesAt: number | null;
  outcome: 'succeed' | 'fail' | null;
}

export interface AccountRecord {
  object: Stripe.V2.Core.Account;
  /** Overrides that a control call has set. */
  transfers: 'none' | 'requested' | 'active' | 'restricted' | 'rejected';
  balances: Record<string, number>;
}

export interface AccountLinkRecord {
  object: Stripe.V2.Core.AccountLink;
  token: string;
  used: boolean;
  done: boolean;
}

export interface EndpointRecord {
  object: Stripe.WebhookEndpoint;
  secret: string;
}

export interface DestinationRecord {
  object: Stripe.V2.Core.EventDestination;
  secret: string;
  url: string;
}

/** A thin event as stored: what `/v2/core/events/{id}` returns. */
export interface ThinEvent {
  id: string;
  object: 'v2.core.event';
  type: string;
  created: string;
  livemode: boolean;
  related_object: { id: string; type: string; url: string } | null;
  reason: { type: 'request'; request: { id: string; idempotency_key: string } } | null;
  data?: Record<string, unknown>;
}

export interface DeliveryRecord {
  id: string;
  eventId: string;
  eventType: string;
  targetId: string;
  thin: boolean;
  attempts: number;
  state: 'waiting' | 'delivered' | 'dropped' | 'given-up';
  /** Real milliseconds; retries are a matter of the network, not of the business clock. */
  nextAt: number;
  createdAt: number;
  lastStatus: number | null;
}

export interface IdempotencyRecord {
  key: string;
  fingerprint: string;
  status: number;
  body: string;
  createdAt: number;
  requestId: string;
}

export interface Tables {
  meta: number;
  sessions: SessionRecord;
  intents: IntentRecord;
  charges: ChargeRecord;
  refunds: RefundRecord;
  transfers: Stripe.Transfer;
  reversals: Stripe.TransferReversal;
  balanceTransactions: Stripe.BalanceTransaction;
  disputes: Stripe.Dispute;
  events: Stripe.Event;
  thinEvents: ThinEvent;
  endpoints: EndpointRecord;
  destinations: DestinationRecord;
  accounts: AccountRecord;
  accountLinks: AccountLinkRecord;
  deliveries: DeliveryRecord;
  idempotency: IdempotencyRecord;
}

export const TABLE_NAMES = [
  'meta',
  'sessions',
  'intents',
  'charges',
  'refunds',
  'transfers',
  'reversals',
  'balanceTransactions',
  'disputes',
  'events',
  'thinEvents',
  'endpoints',
  'destinations',
  'accounts',
  'accountLinks',
  'deliveries',
  'idempotency',
] as const satisfies readonly (keyof Tables)[];
