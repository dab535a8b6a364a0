/** Money: ledger, operations at the payment service, payouts, statements, reconciliation. */
export { openAlarms, raiseAlarm, resolveAlarm } from './alarms.ts';
export { refundPurpose, releasePurpose } from './close-money.ts';
export {
  backfillEvents,
  paymentEventJob,
  processPaymentEvent,
  receiveAccountEvent,
  receivePaymentEvent,
} from './events.ts';
export { executeOperation, recoverOperations } from './execute.ts';
export { fundingObstacle, fundMilestone } from './fund-milestone.ts';
export { accountBalance, booksOf, heldBalance, postLedger, type Booking } from './ledger.ts';
export { moveHeldMoney, planRefund, planTransfer } from './move-held.ts';
export { latestOperation, operationJob } from './operations.ts';
export {
  openOnboarding,
  payoutAccountOf,
  refreshPayoutAccount,
  syncPayoutAccount,
  viewPayoutAccount,
} from './payout-accounts.ts';
export { payoutReady } from './payout-ready.ts';
export { releaseByWindow, releaseMilestone, releaseObstacle, startRelease } from './release-milestone.ts';
export { paymentService, usePaymentService } from './service.ts';
export { closePaymentPage, fundingOf, syncSession } from './sessions.ts';
export { recoverMoney } from './tasks.ts';
export { ledgerOverview, reconcile, reconcileAsAdmin, type Difference } from './reconcile.ts';
export { milestonesWithAttention, retryMoney } from './retry.ts';
export { statementCsv, statementOf, type Statement } from './statement.ts';
