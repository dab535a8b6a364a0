/** Orders: what follows from an award, up to everything but the money itself. */
export { createOrder, milestoneMoney, type CreateOrderInput } from './create-order.ts';
export { acknowledgeOrder, moveOrder } from './acknowledge-order.ts';
export { approvedDrawing, drawingsOf, judgeDrawing, submitDrawing } from './drawings.ts';
export { enterRecord, movePiece, recordsOf, type EnterRecordInput } from './records.ts';
export { asBuiltOutcomeJob } from './as-built-outcome.ts';
export { askRemake, concedeMiss } from './misses.ts';
export {
  acceptPieces,
  acceptSubmission,
  acceptWork,
  returnSubmission,
  submitMilestone,
  tellSubmitted,
} from './submissions.ts';
export {
  confirmReceipt,
  enterDeliveryProof,
  markReceived,
  shipmentsOf,
  shipOrder,
  type ShipInput,
} from './delivery.ts';
export { lookAgain, resumeClocks, stopClocks } from './clocks.ts';
export { orderWaits, waitFacts } from './facts.ts';
export { closeRequest, finishIfDone, resumeAfterFunding } from './close-order.ts';
export { listOrders, orderDeskItems, orderFilters, type OrderListItem } from './list-orders.ts';
export { moveMoney, moveWork, openWhatCanStart, setAttention, windowEnd } from './milestones.ts';
export {
  companyOf,
  milestoneFor,
  milestonesOf,
  openDisputesOf,
  orderFor,
  orderNumberText,
  orderSpecificationOf,
  parties,
  piecesOf,
  sideOf,
  unsafeMilestone,
  unsafeOrder,
  type MilestoneRow,
  type OrderRow,
  type PieceRow,
  type Side,
} from './queries.ts';
export { requireNoDispute, requireRunning } from './guards.ts';
export { acceptanceLines } from './specification.ts';
export { tell, type OrderNews } from './tell.ts';
