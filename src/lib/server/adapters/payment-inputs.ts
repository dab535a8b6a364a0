import type { Currency } from '../../domain/money.ts';

/** What every call that changes something carries: a key that its caller has stored first. */
export interface Keyed {
  idempotencyKey: string;
}

export interface CheckoutSessionInput extends Keyed {
  currency: Currency;
  /** Amounts per unit in minor units. */
  lines: { name: string; description?: string; unitAmount: number; quantity?: number }[];
  /** May contain `{CHECKOUT_SESSION_ID}`. */
  successUrl: string;
  cancelUrl: string;
  clientReferenceId: string;
  transferGroup: string;
  metadata: Record<string, string>;
  customerEmail?: string;
  /** Milliseconds UTC on the service's clock, 30 minutes to 24 hours ahead. */
  expiresAt?: number;
}

export interface TransferInput extends Keyed {
  amount: number;
  currency: Currency;
  destinationId: string;
  transferGroup: string;
  metadata: Record<string, string>;
  /** The charge whose money this is: the transfer then need not wait for available funds. */
  sourceChargeId?: string;
  description?: string;
}

export interface RefundInput extends Keyed {
  chargeId: string;
  amount: number;
  metadata: Record<string, string>;
}

export interface RecipientInput extends Keyed {
  displayName: string;
  contactEmail: string;
  /** ISO 3166-1 alpha-2. */
  country: string;
  metadata: Record<string, string>;
}

export interface Period {
  /** Milliseconds UTC, inclusive. */
  from?: number;
  /** Milliseconds UTC, exclusive. */
  to?: number;
}
