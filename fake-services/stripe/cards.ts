/**
 * The payment service's documented test numbers. Cards: "Testing", section "Cards by brand", "Declined
 * payments", "Refunds", "Available balance", "Disputes", "3D Secure". Bank debits: "Testing", section "SEPA
 * Direct Debit". The numbers are quoted from memory; the contract suite pins what this product relies on.
 */
export interface CardBehaviour {
  kind: 'card' | 'bank_debit';
  brand: string;
  last4: string;
  outcome: 'succeed' | 'decline';
  /** Error code and decline code of a refusal. */
  code: string | null;
  declineCode: string | null;
  /** The holder's bank asks for confirmation first. */
  authenticate: boolean;
  /** Funds are available at once instead of after the payout delay. */
  bypassPending: boolean;
  dispute: 'none' | 'fraudulent' | 'product_not_received' | 'inquiry';
  refund: 'succeed' | 'pending-then-succeed' | 'succeed-then-fail';
  /** Bank debits: seconds until the result is known. */
  settleAfter: number;
}

const good = (brand: string, last4: string, extra: Partial<CardBehaviour> = {}): CardBehaviour => ({
  kind: 'card',
  brand,
  last4,
  outcome: 'succeed',
  code: null,
  declineCode: null,
  authenticate: false,
  bypassPending: false,
  dispute: 'none',
  refund: 'succeed',
  settleAfter: 0,
  ...extra,
});

const declined = (
  last4: string,
  code: string,
  declineCode: string | null,
  extra: Partial<CardBehaviour> = {},
) => good('visa', last4, { outcome: 'decline', code, declineCode, ...extra });

const debit = (last4: string, extra: Partial<CardBehaviour> = {}): CardBehaviour =>
  good('sepa', last4, { kind: 'bank_debit', settleAfter: 2, ...extra });

export const TEST_CARDS: Record<string, CardBehaviour> = {
  '4242424242424242': good('visa', '4242'),
  '4000056655665556': good('visa', '5556'),
  '5555555555554444': good('mastercard', '4444'),
  '2223003122003222': good('mastercard', '3222'),
  '378282246310005': good('amex', '0005'),
  '4000000000000077': good('visa', '0077', { bypassPending: true }),
  '4000000000003220': good('visa', '3220', { authenticate: true }),
  '4000002760003184': good('visa', '3184', { authenticate: true }),
  '4000002500003155': good('visa', '3155', { authenticate: true }),
  '4000008400001629': declined('1629', 'card_declined', 'generic_decline', { authenticate: true }),
  '4000000000000259': good('visa', '0259', { dispute: 'fraudulent' }),
  '4000000000002685': good('visa', '2685', { dispute: 'product_not_received' }),
  '4000000000001976': good('visa', '1976', { dispute: 'inquiry' }),
  '4000000000007726': good('visa', '7726', { refund: 'pending-then-succeed' }),
  '4000000000005126': good('visa', '5126', { refund: 'succeed-then-fail' }),
  '4000000000000002': declined('0002', 'card_declined', 'generic_decline'),
  '4000000000009995': declined('9995', 'card_declined', 'insufficient_funds'),
  '4000000000009987': declined('9987', 'card_declined', 'lost_card'),
  '4000000000009979': declined('9979', 'card_declined', 'stolen_card'),
  '4000000000006975': declined('6975', 'card_declined', 'card_velocity_exceeded'),
  '4100000000000019': declined('0019', 'card_declined', 'fraudulent'),
  '4000000000000069': declined('0069', 'expired_card', null),
  '4000000000000127': declined('0127', 'incorrect_cvc', null),
  '4000000000000119': declined('0119', 'processing_error', null),
};

export const TEST_IBANS: Record<string, CardBehaviour> = {
  AT611904300234573201: debit('3201'),
  DE89370400440532013000: debit('3000'),
  AT321904300235473204: debit('3204', { settleAfter: 180 }),
  DE08370400440532013003: debit('3003', { settleAfter: 180 }),
  AT861904300235473202: debit('3202', { outcome: 'decline', code: 'debit_not_authorized' }),
  DE62370400440532013001: debit('3001', { outcome: 'decline', code: 'debit_not_authorized' }),
};

/** Names under which the API takes the same cards. */
export const TEST_METHODS: Record<string, string> = {
  pm_card_visa: '4242424242424242',
  pm_card_mastercard: '5555555555554444',
  pm_card_bypassPending: '4000000000000077',
  pm_card_authenticationRequired: '4000002760003184',
  pm_card_chargeDeclined: '4000000000000002',
  pm_card_visa_chargeDeclined: '4000000000000002',
  pm_card_chargeDeclinedInsufficientFunds: '4000000000009995',
  pm_card_visa_chargeDeclinedInsufficientFunds: '4000000000009995',
  pm_card_chargeDeclinedExpiredCard: '4000000000000069',
  pm_card_chargeDeclinedIncorrectCvc: '4000000000000127',
  pm_card_chargeDeclinedProcessingError: '4000000000000119',
  pm_card_createDispute: '4000000000000259',
  pm_card_createDisputeProductNotReceived: '4000000000002685',
  pm_card_createDisputeInquiry: '4000000000001976',
  pm_card_pendingRefund: '4000000000007726',
  pm_card_refundFail: '4000000000005126',
};

/** Luhn check digit of a card number (ISO/IEC 7812-1, annex B). */
export function luhnValid(number: string): boolean {
  let sum = 0;
  [...number].reverse().forEach((char, index) => {
    const digit = Number(char);
    const doubled = index % 2 === 1 ? digit * 2 : digit;
    sum += doubled > 9 ? doubled - 9 : doubled;
  });
  return /^\d{12,19}$/.test(number) && sum % 10 === 0;
}

const MESSAGES: Record<string, string> = {
  insufficient_funds: 'The card has insufficient funds.',
  lost_card: 'The card was declined.',
  stolen_card: 'The card was declined.',
  card_velocity_exceeded: 'The card was declined: too many payments in a short time.',
  expired_card: 'The card has expired.',
  incorrect_cvc: "The card's security code is incorrect.",
  processing_error: 'An error occurred while processing the card. Try again in a little while.',
  incorrect_number: 'The card number is incorrect.',
  debit_not_authorized: 'The bank debit was not authorised.',
};

export function declineMessage(card: CardBehaviour): string {
  return MESSAGES[card.declineCode ?? ''] ?? MESSAGES[card.code ?? ''] ?? 'The card was declined.';
}
