/**
 * The accounts of the platform's books. Assets and expenses grow on the debit side, liabilities and
 * income on the credit side. `held` is one account per milestone, `payable` and `receivable` one per
 * fabricator and currency, `unallocated` one per order (money that came in and belongs to no milestone:
 * a second payment, or one that differs from what was asked).
 */
export const ledgerAccountKinds = [
  'clearing',
  'held',
  'unallocated',
  'payable',
  'platform-fee',
  'processor-fee',
  'dispute-loss',
  'receivable',
  'rounding',
] as const;
export type LedgerAccountKind = (typeof ledgerAccountKinds)[number];

export const ledgerAccountText: Record<LedgerAccountKind, string> = {
  clearing: 'Balance at the payment service',
  held: 'Held for a milestone',
  unallocated: 'Received, to be sent back',
  payable: 'Payable to the fabricator',
  'platform-fee': 'Platform fee',
  'processor-fee': 'Fees of the payment service',
  'dispute-loss': 'Costs of charge-backs',
  receivable: 'Receivable from the fabricator',
  rounding: 'Rounding',
};

export const ledgerTxKinds = [
  'fund',
  'release',
  'refund',
  'refund-failed',
  'surplus',
  'surplus-refund',
  'surplus-refund-failed',
  'charge-back',
  'charge-back-won',
  'charge-back-fee',
  'outside-refund',
  'transfer-reversal',
] as const;
export type LedgerTxKind = (typeof ledgerTxKinds)[number];

export const ledgerTxText: Record<LedgerTxKind, string> = {
  fund: 'Paid by the buyer, held by the platform',
  release: 'Released to the fabricator',
  refund: 'Refunded to the buyer',
  'refund-failed': 'Refund came back',
  surplus: 'Payment without a milestone to hold it for',
  'surplus-refund': 'Payment without a milestone sent back',
  'surplus-refund-failed': 'Sending back failed',
  'charge-back': 'Payment taken back by the card holder’s bank',
  'charge-back-won': 'Taken-back payment returned',
  'charge-back-fee': 'Cost of a charge-back',
  'outside-refund': 'Refund made outside the order',
  'transfer-reversal': 'Payout returned by the fabricator',
};
