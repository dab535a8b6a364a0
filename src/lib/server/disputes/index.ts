/** Disputes: a stop on held money, until both settle or the platform has decided. */
export { appealDispute, decideAppeal, decideDispute, finaliseDecision, type DecideInput } from './decide.ts';
export { openDispute, type OpenDisputeInput } from './open-dispute.ts';
export {
  decisionsOf,
  listDisputes,
  offersOf,
  statementsOf,
  unsafeDispute,
  unsafeDisputesOfOrder,
  type DisputeRow,
} from './queries.ts';
export { answerOffer, offerSettlement } from './settle.ts';
export { addStatement, withdrawDispute, type StatementInput } from './statements.ts';
