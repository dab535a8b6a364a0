import { defineStateMachine } from './transitions.ts';
import type { DisputeState } from './dispute-states.ts';

export const milestoneKinds = ['material', 'drawing', 'build', 'delivery'] as const;
export type MilestoneKind = (typeof milestoneKinds)[number];

export const milestoneKindText: Record<MilestoneKind, string> = {
  material: 'Material',
  drawing: 'Drawing',
  build: 'Build',
  delivery: 'Delivery',
};

export const workStates = ['planned', 'open', 'submitted', 'accepted', 'cancelled'] as const;
export type WorkState = (typeof workStates)[number];

/** Where the work of a milestone stands. A returned submission goes back to open; its money stays held. */
export const workMachine = defineStateMachine({
  name: 'milestone-work',
  initial: 'planned',
  states: workStates,
  transitions: [
    { event: 'open', from: ['planned'], to: 'open' },
    { event: 'submit', from: ['open'], to: 'submitted' },
    { event: 'return', from: ['submitted'], to: 'open' },
    { event: 'accept', from: ['submitted'], to: 'accepted' },
    // A settlement, a decision or an end by agreement closes the work where it stands.
    { event: 'conclude', from: ['planned', 'open', 'submitted'], to: 'accepted' },
    { event: 'cancel', from: ['planned', 'open', 'submitted'], to: 'cancelled' },
  ],
});

export const moneyStates = [
  'unfunded',
  'paying',
  'held',
  'releasing',
  'released',
  'refunding',
  'refunded',
  'splitting',
  'split',
  'charged-back',
] as const;
export type MoneyState = (typeof moneyStates)[number];

/** Where the money of a milestone is. States that end in -ing are in flight at the payment service. */
export const moneyMachine = defineStateMachine({
  name: 'milestone-money',
  initial: 'unfunded',
  states: moneyStates,
  transitions: [
    { event: 'start-payment', from: ['unfunded'], to: 'paying' },
    { event: 'payment-lapsed', from: ['paying'], to: 'unfunded' },
    // The webhook may come before our own response is stored, or after the session was given up.
    { event: 'hold', from: ['unfunded', 'paying'], to: 'held' },
    { event: 'release', from: ['held'], to: 'releasing' },
    { event: 'released', from: ['releasing'], to: 'released' },
    // Only while the transfer was refused for certain, so that nothing can be paid twice.
    { event: 'release-withdrawn', from: ['releasing'], to: 'held' },
    { event: 'refund', from: ['held'], to: 'refunding' },
    { event: 'refunded', from: ['refunding'], to: 'refunded' },
    { event: 'refund-failed', from: ['refunded'], to: 'refunding' },
    { event: 'split', from: ['held'], to: 'splitting' },
    { event: 'split-done', from: ['splitting'], to: 'split' },
    { event: 'split-refund-failed', from: ['split'], to: 'splitting' },
    { event: 'charge-back', from: ['held', 'released', 'split'], to: 'charged-back' },
    { event: 'charge-back-won', from: ['charged-back'], to: 'held' },
    { event: 'charge-back-won-after-release', from: ['charged-back'], to: 'released' },
    { event: 'charge-back-won-after-split', from: ['charged-back'], to: 'split' },
  ],
});

/** Money that has come to its end; a milestone without money and with cancelled work counts too. */
export const finalMoneyStates: readonly MoneyState[] = ['released', 'refunded', 'split', 'charged-back'];

export type Tone = 'plain' | 'waiting' | 'good' | 'caution' | 'bad';

/**
 * The one word that screens show for a milestone, derived from work, money and an open dispute, with
 * the tone it is shown in. Money in flight and disputes come first, because they are what a person
 * must know before anything else.
 */
export function milestoneWord(
  work: WorkState,
  money: MoneyState,
  dispute: DisputeState | null,
): { word: string; tone: Tone } {
  if (dispute === 'open' || dispute === 'answered') return { word: 'disputed', tone: 'bad' };
  if (dispute === 'decided') return { word: 'decided, may be appealed', tone: 'caution' };
  if (dispute === 'appealed') return { word: 'appealed', tone: 'bad' };
  switch (money) {
    case 'charged-back':
      return { word: 'charged back', tone: 'bad' };
    case 'releasing':
      return { word: 'being paid out', tone: 'waiting' };
    case 'released':
      return { word: 'released', tone: 'good' };
    case 'refunding':
      return { word: 'being refunded', tone: 'waiting' };
    case 'refunded':
      return { word: 'refunded', tone: 'plain' };
    case 'splitting':
      return { word: 'being split', tone: 'waiting' };
    case 'split':
      return { word: 'split', tone: 'plain' };
    case 'unfunded':
      return work === 'cancelled'
        ? { word: 'cancelled', tone: 'plain' }
        : { word: 'not funded', tone: 'caution' };
    case 'paying':
      return { word: 'payment under way', tone: 'waiting' };
    case 'held':
      break;
  }
  switch (work) {
    case 'planned':
      return { word: 'held, not started', tone: 'plain' };
    case 'open':
      return { word: 'in work', tone: 'waiting' };
    case 'submitted':
      return { word: 'submitted', tone: 'waiting' };
    case 'accepted':
      return { word: 'accepted, to release', tone: 'good' };
    case 'cancelled':
      return { word: 'cancelled', tone: 'plain' };
  }
}

export const attentionReasons = [
  'payee-restricted',
  'transfer-refused',
  'balance-insufficient',
  'refund-failed',
  'refund-refused',
  'payment-failed',
  'payment-expired',
  'amount-differs',
  'charge-back',
  'refund-after-release',
  'service-unclear',
] as const;
export type AttentionReason = (typeof attentionReasons)[number];

export const attentionText: Record<AttentionReason, string> = {
  'payee-restricted':
    'The payout account of the fabricator cannot receive money at present. The money stays held by the platform and goes out once the account is in order.',
  'transfer-refused':
    'The payment service refused the payout. The platform is looking into it; nothing is lost.',
  'balance-insufficient': 'The payout waits until the payment has become available at the payment service.',
  'refund-failed': 'The refund came back from the bank. The platform is looking into another way.',
  'refund-refused':
    'The payment service refused the refund. The platform is looking into it; nothing is lost.',
  'payment-failed': 'The last payment was declined. Another card or another try is possible at any time.',
  'payment-expired': 'The payment page expired before it was paid. It can be opened anew.',
  'amount-differs': 'A payment arrived that differs from what was asked. The platform is looking into it.',
  'charge-back': 'The card holder’s bank took the payment back. The platform is looking into it.',
  'refund-after-release': 'A refund was made after the release. The platform is looking into it.',
  'service-unclear': 'The payment service has not confirmed this yet. It is asked again until it is certain.',
};
