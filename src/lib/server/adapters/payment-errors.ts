import { Stripe } from 'stripe';
import { z } from 'zod';

/**
 * What a failed call means for the caller:
 * - `declined`: the card or its bank refused; the buyer has to do something.
 * - `insufficient-balance`: the platform's available balance does not cover it; later, or from the charge.
 * - `payee-restricted`: the account cannot receive transfers now.
 * - `already-refunded`, `disputed`: the charge is no longer refundable.
 * - `missing`: the named object does not exist.
 * - `key-reused`: the idempotency key was used with other parameters: a defect of ours.
 * - `retryable`: nothing happened; the same call with the same key may be made later.
 * - `unknown`: nobody knows whether it happened; the same call with the same key tells. When `replayed` is set,
 *   the service repeats a stored failure: look the object up, then use a new key.
 * - `invalid`: the service refused the call for another reason; repeating it does not help.
 * - `unauthorized`: the secret key was refused.
 * - `bad-signature`: a webhook is not from the service, or too old.
 */
export type PaymentErrorKind =
  | 'declined'
  | 'insufficient-balance'
  | 'payee-restricted'
  | 'already-refunded'
  | 'disputed'
  | 'missing'
  | 'key-reused'
  | 'retryable'
  | 'unknown'
  | 'invalid'
  | 'unauthorized'
  | 'bad-signature';

export class PaymentServiceError extends Error {
  readonly kind: PaymentErrorKind;
  readonly code: string | undefined;
  readonly declineCode: string | undefined;
  readonly requestId: string | undefined;
  /** The answer was stored for the idempotency key earlier. */
  readonly replayed: boolean;

  constructor(
    kind: PaymentErrorKind,
    message: string,
    details: {
      code?: string | undefined;
      declineCode?: string | undefined;
      requestId?: string | undefined;
      replayed?: boolean;
      cause?: unknown;
    } = {},
  ) {
    super(message, { cause: details.cause });
    this.name = 'PaymentServiceError';
    this.kind = kind;
    this.code = details.code;
    this.declineCode = details.declineCode;
    this.requestId = details.requestId;
    this.replayed = details.replayed ?? false;
  }
}

const KIND_BY_CODE: Record<string, PaymentErrorKind> = {
  balance_insufficient: 'insufficient-balance',
  insufficient_funds: 'insufficient-balance',
  transfers_not_allowed: 'payee-restricted',
  insufficient_capabilities_for_transfer: 'payee-restricted',
  account_closed: 'payee-restricted',
  account_invalid: 'payee-restricted',
  charge_already_refunded: 'already-refunded',
  charge_disputed: 'disputed',
  refund_disputed_payment: 'disputed',
  resource_missing: 'missing',
  not_found: 'missing',
  rate_limit: 'retryable',
  lock_timeout: 'retryable',
  idempotency_key_in_use: 'retryable',
};

function kindOf(error: Stripe.errors.StripeError): PaymentErrorKind {
  const status = error.statusCode;
  // Without a status there was no complete answer.
  if (error instanceof Stripe.errors.StripeConnectionError || status === undefined) return 'unknown';
  if (error instanceof Stripe.errors.StripeCardError) return 'declined';
  if (status >= 500) return 'unknown';
  const byCode = KIND_BY_CODE[error.code ?? ''];
  if (byCode !== undefined) return byCode;
  if (status === 429 || status === 409) return 'retryable';
  if (error.rawType === 'idempotency_error') return 'key-reused';
  if (status === 401 || status === 403) return 'unauthorized';
  if (status === 404) return 'missing';
  return 'invalid';
}

const replayedHeader = z.object({ 'idempotent-replayed': z.literal('true') });

/** Classifies what the SDK threw, by type, status and code, never by text. */
export function toPaymentError(error: unknown): PaymentServiceError {
  if (error instanceof PaymentServiceError) return error;
  if (error instanceof z.ZodError) {
    // The call went through and its answer is not what we know: the effect is there, its details are not.
    return new PaymentServiceError(
      'unknown',
      `unexpected answer of the payment service: ${z.prettifyError(error)}`,
      {
        cause: error,
      },
    );
  }
  if (!(error instanceof Stripe.errors.StripeError)) {
    return new PaymentServiceError('unknown', error instanceof Error ? error.message : String(error), {
      cause: error,
    });
  }
  return new PaymentServiceError(kindOf(error), error.message, {
    code: error.code,
    declineCode: error.decline_code,
    requestId: error.requestId,
    replayed: replayedHeader.safeParse(error.headers).success,
    cause: error,
  });
}
