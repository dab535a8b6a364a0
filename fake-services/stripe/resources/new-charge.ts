import type { Stripe } from 'stripe';
import { declineMessage, type CardBehaviour } from '../cards.ts';
import type { PaymentService } from '../core/service.ts';

function methodDetails(
  card: CardBehaviour,
  amount: number,
  failed: boolean,
): Stripe.Charge.PaymentMethodDetails {
  if (card.kind === 'bank_debit') {
    return {
      type: 'sepa_debit',
      sepa_debit: {
        bank_code: null,
        branch_code: null,
        country: null,
        fingerprint: null,
        last4: card.last4,
        mandate: null,
      },
    } satisfies Stripe.Charge.PaymentMethodDetails;
  }
  return {
    type: 'card',
    card: {
      amount_authorized: failed ? null : amount,
      authorization_code: null,
      brand: card.brand,
      checks: { address_line1_check: null, address_postal_code_check: null, cvc_check: 'pass' },
      country: 'DE',
      electronic_commerce_indicator: null,
      exp_month: 12,
      exp_year: 2034,
      funding: 'credit',
      installments: null,
      last4: card.last4,
      mandate: null,
      network: card.brand,
      network_transaction_id: null,
      regulated_status: null,
      three_d_secure: null,
      transaction_link_id: null,
      wallet: null,
    },
  } satisfies Stripe.Charge.PaymentMethodDetails;
}

/** A charge as the service shows it, in one of the three ways it can begin. */
export function newCharge(
  service: PaymentService,
  intent: Stripe.PaymentIntent,
  card: CardBehaviour,
  status: 'succeeded' | 'pending' | 'failed',
): Stripe.Charge {
  const failed = status === 'failed';
  return {
    id: service.store.id('ch'),
    object: 'charge',
    amount: intent.amount,
    amount_captured: failed ? 0 : intent.amount,
    amount_refunded: 0,
    application: null,
    application_fee: null,
    application_fee_amount: null,
    balance_transaction: null,
    billing_details: { address: null, email: intent.receipt_email, name: null, phone: null, tax_id: null },
    calculated_statement_descriptor: 'COILYARD',
    captured: !failed,
    created: service.now(),
    currency: intent.currency,
    customer: null,
    description: intent.description,
    disputed: false,
    failure_balance_transaction: null,
    failure_code: failed ? card.code : null,
    failure_message: failed ? declineMessage(card) : null,
    fraud_details: {},
    livemode: false,
    metadata: { ...intent.metadata },
    on_behalf_of: null,
    outcome: {
      advice_code: failed ? 'try_again_later' : null,
      network_advice_code: null,
      network_decline_code: failed ? '05' : null,
      network_status: failed ? 'declined_by_network' : 'approved_by_network',
      reason: failed ? card.declineCode : null,
      risk_level: 'normal',
      seller_message: failed ? 'The bank did not return any further details.' : 'Payment complete.',
      type: failed ? 'issuer_declined' : 'authorized',
    },
    paid: status === 'succeeded',
    payment_intent: intent.id,
    payment_method: null,
    payment_method_details: methodDetails(card, intent.amount, failed),
    receipt_email: intent.receipt_email,
    receipt_number: null,
    receipt_url: null,
    refunded: false,
    review: null,
    shipping: null,
    source: null,
    source_transfer: null,
    statement_descriptor: null,
    statement_descriptor_suffix: intent.statement_descriptor_suffix,
    status,
    transfer_data: null,
    transfer_group: intent.transfer_group,
  } satisfies Stripe.Charge;
}
