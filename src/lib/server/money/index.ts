/** Money: ledger, operations at the payment service, payouts, statements, reconciliation. */
export { payoutReady } from './payout-ready.ts';
