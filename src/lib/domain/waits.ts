/**
 * The waits of an order: who must do what by when, and what happens otherwise. Pure, from the terms fixed
 * at award; the order room shows them and the worker acts on them, so both always say the same.
 */
import { addWorkingDays, dateIn, dayMs, endOfDate } from './dates.ts';
import type { DisputeState } from './dispute-states.ts';
import {
  milestoneKindText,
  type MilestoneKind,
  type MoneyState,
  type WorkState,
} from './milestone-states.ts';
import type { OrderState } from './order-states.ts';
import type { OrderTerms } from './order-terms.ts';
import type { Permission } from './permissions.ts';

export type WaitOwner = 'buyer' | 'fabricator' | 'platform';

export const waitKinds = [
  'acknowledge',
  'fund',
  'fund-end',
  'drawing-submit',
  'drawing-answer',
  'drawing-end',
  'build-submit',
  'build-end',
  'miss-answer',
  'ship',
  'receipt',
  'receipt-proof',
  'window',
  'release',
  'dispute-answer',
  'dispute-decision',
  'appeal',
  'appeal-decision',
] as const;
export type WaitKind = (typeof waitKinds)[number];

export interface Wait {
  kind: WaitKind;
  owner: WaitOwner;
  /** What is waited for, as an act: "Fund the drawing milestone". */
  what: string;
  since: number;
  /** null: no deadline. */
  dueAt: number | null;
  /** What happens when the time is over. */
  otherwise: string;
  /** Row that it is about, for the key of reminders. */
  subjectId: string;
  milestoneId: string | null;
  /** Place in the order room. */
  anchor: string;
}

export interface WaitFacts {
  order: {
    id: string;
    state: OrderState;
    terms: OrderTerms;
    buyerZone: string;
    awardedAt: number;
    dueDate: string | null;
    clockStoppedAt: number | null;
    clockResumedAt: number | null;
  };
  milestones: {
    id: string;
    kind: MilestoneKind;
    work: WorkState;
    money: MoneyState;
    fundingAskedAt: number | null;
    openedAt: number | null;
    windowEndsAt: number | null;
    submittedAt: number | null;
    acceptedAt: number | null;
  }[];
  /** The revision waiting for an answer. */
  drawing: { id: string; letter: string; submittedAt: number } | null;
  /** Records outside limits that the buyer has not answered. */
  misses: { id: string; serial: string; enteredAt: number }[];
  shipment: {
    id: string;
    createdAt: number;
    deliveryProofAt: number | null;
    receivedAt: number | null;
  } | null;
  disputes: {
    id: string;
    state: DisputeState;
    openedBy: 'buyer' | 'fabricator';
    openedAt: number;
    answerDueAt: number;
    decisionDueAt: number;
    appealUntil: number | null;
    milestoneId: string;
  }[];
}

/** End of the n-th working day after an instant, in the buyer's zone. */
function workingDaysAfter(zone: string, since: number, days: number): number {
  return endOfDate(zone, addWorkingDays(dateIn(zone, since), days));
}

function fundingWaits(facts: WaitFacts, m: WaitFacts['milestones'][number], since: number): Wait[] {
  const { terms } = facts.order;
  const name = milestoneKindText[m.kind].toLowerCase();
  const base = {
    owner: 'buyer' as const,
    since,
    subjectId: m.id,
    milestoneId: m.id,
    anchor: `milestone-${m.id}`,
    what: `Fund the ${name} milestone`,
  };
  return [
    {
      ...base,
      kind: 'fund',
      dueAt: since + terms.fundSuspendDays * dayMs,
      otherwise: 'The fabricator may suspend the order.',
    },
    {
      ...base,
      kind: 'fund-end',
      dueAt: since + terms.fundEndDays * dayMs,
      otherwise: 'Either side may end the order.',
    },
  ];
}

function drawingWaits(
  facts: WaitFacts,
  m: WaitFacts['milestones'][number],
  from: (at: number) => number,
): Wait[] {
  const { terms, buyerZone } = facts.order;
  if (!facts.drawing) {
    return [
      {
        kind: 'drawing-submit',
        owner: 'fabricator',
        what: 'Submit the drawing',
        since: m.openedAt ?? facts.order.awardedAt,
        dueAt: null,
        otherwise:
          'The lead time begins with the approval of the drawing; a late drawing makes a late delivery.',
        subjectId: m.id,
        milestoneId: m.id,
        anchor: 'drawings',
      },
    ];
  }
  const since = from(facts.drawing.submittedAt);
  const base = {
    owner: 'buyer' as const,
    what: `Judge drawing revision ${facts.drawing.letter}`,
    since,
    subjectId: facts.drawing.id,
    milestoneId: m.id,
    anchor: 'drawings',
  };
  return [
    {
      ...base,
      kind: 'drawing-answer',
      dueAt: workingDaysAfter(buyerZone, since, terms.drawingShiftWorkingDays),
      otherwise: 'The due date moves day for day. Silence never approves a drawing.',
    },
    {
      ...base,
      kind: 'drawing-end',
      dueAt: workingDaysAfter(buyerZone, since, terms.drawingEndWorkingDays),
      otherwise: 'The fabricator may end the order, with the drawing share released.',
    },
  ];
}

function buildWaits(
  facts: WaitFacts,
  m: WaitFacts['milestones'][number],
  from: (at: number) => number,
): Wait[] {
  const { terms, buyerZone, dueDate } = facts.order;
  const waits: Wait[] = facts.misses.map((miss) => {
    const since = from(miss.enteredAt);
    return {
      kind: 'miss-answer',
      owner: 'buyer',
      what: `Answer the record of ${miss.serial}, which is outside its limits`,
      since,
      dueAt: workingDaysAfter(buyerZone, since, terms.missAnswerWorkingDays),
      otherwise: 'The fabricator may open a dispute.',
      subjectId: miss.id,
      milestoneId: m.id,
      anchor: 'pieces',
    };
  });
  const since = m.openedAt ?? facts.order.awardedAt;
  const due = dueDate === null ? null : endOfDate(buyerZone, dueDate);
  const base = {
    owner: 'fabricator' as const,
    since,
    subjectId: m.id,
    milestoneId: m.id,
    anchor: 'pieces',
  };
  waits.push({
    ...base,
    kind: 'build-submit',
    what: 'Build, measure and submit the pieces',
    dueAt: due,
    otherwise: `The order is late; ${terms.overdueEndDays} days later the buyer may end it and all that is held is refunded.`,
  });
  if (due !== null) {
    waits.push({
      ...base,
      kind: 'build-end',
      what: 'Submit the overdue pieces',
      dueAt: due + terms.overdueEndDays * dayMs,
      otherwise: 'The buyer may end the order; all that is held is refunded.',
    });
  }
  return waits;
}

function deliveryWaits(
  facts: WaitFacts,
  m: WaitFacts['milestones'][number],
  from: (at: number) => number,
): Wait[] {
  const { shipment, order } = facts;
  const base = { milestoneId: m.id, anchor: 'delivery' };
  if (!shipment) {
    return [
      {
        ...base,
        kind: 'ship',
        owner: 'fabricator',
        what: 'Ship the pieces and enter the shipping details',
        since: m.openedAt ?? order.awardedAt,
        dueAt: order.dueDate === null ? null : endOfDate(order.buyerZone, order.dueDate),
        otherwise: `The order is late; ${order.terms.overdueEndDays} days later the buyer may end it.`,
        subjectId: m.id,
      },
    ];
  }
  if (shipment.receivedAt !== null) return [];
  if (shipment.deliveryProofAt === null) {
    return [
      {
        ...base,
        kind: 'receipt',
        owner: 'buyer',
        what: 'Confirm the receipt when it arrives',
        since: shipment.createdAt,
        dueAt: null,
        otherwise: 'With a proof of delivery of the fabricator the inspection window starts by itself.',
        subjectId: shipment.id,
      },
    ];
  }
  const since = from(shipment.deliveryProofAt);
  return [
    {
      ...base,
      kind: 'receipt-proof',
      owner: 'buyer',
      what: 'Confirm the receipt',
      since,
      dueAt: since + order.terms.receiptDays * dayMs,
      otherwise: 'The inspection window starts by itself.',
      subjectId: shipment.id,
    },
  ];
}

/** Held money whose work is submitted or accepted: the end of the window releases it. */
function windowWait(m: WaitFacts['milestones'][number]): Wait | null {
  if (m.money !== 'held' || m.windowEndsAt === null || m.submittedAt === null) return null;
  if (m.work !== 'submitted' && m.work !== 'accepted') return null;
  const name = milestoneKindText[m.kind].toLowerCase();
  const judged = m.work === 'accepted';
  return {
    kind: judged ? 'release' : 'window',
    owner: 'buyer',
    what: judged
      ? `Release the ${name} milestone`
      : `Inspect and release the ${name} milestone, or return it, or open a dispute`,
    since: m.submittedAt,
    dueAt: m.windowEndsAt,
    otherwise: 'The money is released when the window ends.',
    subjectId: m.id,
    milestoneId: m.id,
    anchor: `milestone-${m.id}`,
  };
}

function disputeWaits(dispute: WaitFacts['disputes'][number]): Wait[] {
  const base = {
    subjectId: dispute.id,
    milestoneId: dispute.milestoneId,
    anchor: 'dispute',
    since: dispute.openedAt,
  };
  switch (dispute.state) {
    case 'open':
      return [
        {
          ...base,
          kind: 'dispute-answer',
          owner: dispute.openedBy === 'buyer' ? 'fabricator' : 'buyer',
          what: 'Answer the dispute',
          dueAt: dispute.answerDueAt,
          otherwise: 'The platform decides without the answer.',
        },
      ];
    case 'answered':
      return [
        {
          ...base,
          kind: 'dispute-decision',
          owner: 'platform',
          what: 'Decide the dispute',
          dueAt: dispute.decisionDueAt,
          otherwise: 'The platform is reminded; the money stays held.',
        },
      ];
    case 'decided':
      return [
        {
          ...base,
          kind: 'appeal',
          owner: 'platform',
          what: 'Carry out the decision, unless a side appeals',
          dueAt: dispute.appealUntil,
          otherwise: 'The decision becomes final and the money moves.',
        },
      ];
    case 'appealed':
      return [
        {
          ...base,
          kind: 'appeal-decision',
          owner: 'platform',
          what: 'Decide the appeal by a second admin',
          dueAt: null,
          otherwise: 'The money stays held.',
        },
      ];
    default:
      return [];
  }
}

/** All waits of an order now, the nearest first. While a dispute is open, only its own clocks run. */
export function waitsOf(facts: WaitFacts): Wait[] {
  const { order } = facts;
  const disputes = facts.disputes.flatMap(disputeWaits);
  if (order.clockStoppedAt !== null) return disputes;
  const from = (at: number) => Math.max(at, order.clockResumedAt ?? 0);
  const waits: Wait[] = [...disputes];
  if (order.state === 'to-acknowledge') {
    waits.push({
      kind: 'acknowledge',
      owner: 'fabricator',
      what: 'Acknowledge the order',
      since: order.awardedAt,
      dueAt: workingDaysAfter(order.buyerZone, order.awardedAt, order.terms.acknowledgeWorkingDays),
      otherwise: 'The buyer may end this order and award another bid.',
      subjectId: order.id,
      milestoneId: null,
      anchor: 'state',
    });
  }
  if (order.state === 'running' || order.state === 'suspended') {
    let first = true;
    for (const m of facts.milestones) {
      const window = windowWait(m);
      if (window) waits.push(window);
      const closed = m.work === 'accepted' || m.work === 'cancelled';
      if (closed || !first) continue;
      first = false;
      if (m.money === 'unfunded' || m.money === 'paying') {
        if (m.fundingAskedAt !== null) waits.push(...fundingWaits(facts, m, m.fundingAskedAt));
      } else if (m.work === 'open' && order.state === 'running') {
        if (m.kind === 'drawing') waits.push(...drawingWaits(facts, m, from));
        if (m.kind === 'build') waits.push(...buildWaits(facts, m, from));
        if (m.kind === 'delivery') waits.push(...deliveryWaits(facts, m, from));
      }
    }
  }
  return waits.sort((a, b) => (a.dueAt ?? Infinity) - (b.dueAt ?? Infinity));
}

/** Rights that an over-due wait gives. */
export type Ground = 'not-acknowledged' | 'not-funded' | 'drawing-unanswered' | 'overdue' | 'may-suspend';

const groundOf: Partial<Record<WaitKind, { ground: Ground; sides: readonly ('buyer' | 'fabricator')[] }>> = {
  acknowledge: { ground: 'not-acknowledged', sides: ['buyer'] },
  fund: { ground: 'may-suspend', sides: ['fabricator'] },
  'fund-end': { ground: 'not-funded', sides: ['buyer', 'fabricator'] },
  'drawing-end': { ground: 'drawing-unanswered', sides: ['fabricator'] },
  'build-end': { ground: 'overdue', sides: ['buyer'] },
};

/** What a side may do now because a wait is over. */
export function groundsFor(waits: readonly Wait[], side: 'buyer' | 'fabricator', now: number): Ground[] {
  return waits.flatMap((wait) => {
    const right = groundOf[wait.kind];
    return right && wait.dueAt !== null && wait.dueAt <= now && right.sides.includes(side)
      ? [right.ground]
      : [];
  });
}

export const groundText: Record<Ground, string> = {
  'not-acknowledged': 'The order was not acknowledged in time.',
  'not-funded': 'The milestone was not funded in time.',
  'drawing-unanswered': 'The drawing was not answered in time.',
  overdue: 'The fabricator is overdue.',
  'may-suspend': 'The milestone was not funded in time.',
};

/** What a person must be allowed to do to end a wait. */
export const actOfWait: Record<WaitKind, Permission> = {
  acknowledge: 'order.acknowledge',
  fund: 'milestone.fund',
  'fund-end': 'milestone.fund',
  'drawing-submit': 'drawing.submit',
  'drawing-answer': 'drawing.judge',
  'drawing-end': 'drawing.judge',
  'build-submit': 'record.enter',
  'build-end': 'record.enter',
  'miss-answer': 'record.judge',
  ship: 'order.ship',
  receipt: 'receipt.confirm',
  'receipt-proof': 'receipt.confirm',
  window: 'milestone.release',
  release: 'milestone.release',
  'dispute-answer': 'order.dispute',
  'dispute-decision': 'admin.decide-dispute',
  appeal: 'admin.decide-dispute',
  'appeal-decision': 'admin.decide-dispute',
};

const nextStep: Partial<Record<WaitKind, WaitKind>> = {
  fund: 'fund-end',
  'drawing-answer': 'drawing-end',
  'build-submit': 'build-end',
};

/** The waits as people see them: of two steps of one wait the one that is next. */
export function presentWaits(waits: readonly Wait[], now: number): Wait[] {
  const passed = (wait: Wait) => wait.dueAt !== null && wait.dueAt <= now;
  return waits.filter((wait) => {
    const later = nextStep[wait.kind];
    if (later && waits.some((other) => other.kind === later)) return !passed(wait);
    const earlier = Object.entries(nextStep).find(([, step]) => step === wait.kind)?.[0];
    const first = waits.find((other) => other.kind === earlier && other.subjectId === wait.subjectId);
    return first === undefined || passed(first);
  });
}
