/**
 * What every wait of an order has: how long it lasts and what happens then. Fixed at award, so that a
 * later change of the defaults never touches a running order. Days are calendar days unless the name
 * says working days (Monday to Friday).
 */
export interface OrderTerms {
  /** Not acknowledged: the buyer may award another bid. */
  acknowledgeWorkingDays: number;
  /** Not funded: the fabricator may suspend. */
  fundSuspendDays: number;
  /** Not funded: either may end. */
  fundEndDays: number;
  /** Drawing not answered: due dates move day for day. */
  drawingShiftWorkingDays: number;
  /** Drawing not answered: the fabricator may end with the drawing share released. */
  drawingEndWorkingDays: number;
  /** As-built miss not answered: the fabricator may open a dispute. */
  missAnswerWorkingDays: number;
  /** Receipt not confirmed: proof of delivery plus this many days starts the window. */
  receiptDays: number;
  /** Fabricator overdue: the buyer may end, all held is refunded. */
  overdueEndDays: number;
  disputeAnswerDays: number;
  disputeDecisionDays: number;
  appealDays: number;
  /** Reminders before the end of a wait, days. */
  remindBeforeDays: number[];
}

export const defaultOrderTerms: OrderTerms = {
  acknowledgeWorkingDays: 3,
  fundSuspendDays: 10,
  fundEndDays: 30,
  drawingShiftWorkingDays: 5,
  drawingEndWorkingDays: 20,
  missAnswerWorkingDays: 5,
  receiptDays: 3,
  overdueEndDays: 14,
  disputeAnswerDays: 7,
  disputeDecisionDays: 10,
  appealDays: 5,
  remindBeforeDays: [5, 2, 1],
};

/** Platform fee in basis points of the net price, fixed at award. */
export const platformFeeBasisPoints = 500;
