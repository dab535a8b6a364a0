import type { DisputeReason, DisputeState } from '$lib/domain/dispute-states.ts';
import type { MilestoneKind } from '$lib/domain/milestone-states.ts';

/** A dispute as its parties and the admin read it. */
export interface DisputeFileView {
  zone: string;
  order: {
    number: string;
    title: string;
    currency: string;
    buyerName: string;
    fabricatorName: string;
    buyerZone: string;
  };
  milestone: { kind: MilestoneKind };
  held: number;
  dispute: {
    state: DisputeState;
    reason: DisputeReason;
    complaintAbout: string;
    amountClaimed: number;
    openedAt: number;
    openedBy: string;
    answerDueAt: number;
    decisionDueAt: number;
    appealUntil: number | null;
    releaseAmount: number | null;
    refundAmount: number | null;
  };
  statements: {
    id: string;
    kind: 'opening' | 'answer' | 'statement' | 'appeal';
    at: number;
    author: string;
    company: string;
    text: string;
    files: { id: string; name: string; size: number }[];
  }[];
  decisions: {
    instance: number;
    at: number;
    release: number;
    refund: number;
    goods: string;
    otherMilestones: string;
    freightPaidBy: 'buyer' | 'fabricator' | 'none';
    reason: string;
  }[];
}
