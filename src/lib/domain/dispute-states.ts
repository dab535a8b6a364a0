import { defineStateMachine } from './transitions.ts';

export const disputeStates = [
  'open',
  'answered',
  'decided',
  'appealed',
  'final',
  'settled',
  'withdrawn',
] as const;
export type DisputeState = (typeof disputeStates)[number];

/** Money moves in `final` and `settled` only; until then it stays held. */
export const disputeMachine = defineStateMachine({
  name: 'dispute',
  initial: 'open',
  states: disputeStates,
  transitions: [
    { event: 'answer', from: ['open'], to: 'answered' },
    { event: 'decide', from: ['open', 'answered'], to: 'decided' },
    { event: 'appeal', from: ['decided'], to: 'appealed' },
    { event: 'become-final', from: ['decided'], to: 'final' },
    { event: 'decide-appeal', from: ['appealed'], to: 'final' },
    { event: 'settle', from: ['open', 'answered', 'decided', 'appealed'], to: 'settled' },
    { event: 'withdraw', from: ['open', 'answered'], to: 'withdrawn' },
  ],
});

/** As long as a dispute is in one of these it blocks release, refund and the clocks of the order. */
export const openDisputeStates: readonly DisputeState[] = ['open', 'answered', 'decided', 'appealed'];

export const disputeStateText: Record<DisputeState, string> = {
  open: 'open, waits for the answer',
  answered: 'answered, waits for the decision',
  decided: 'decided, may be appealed',
  appealed: 'appealed, waits for the second decision',
  final: 'final',
  settled: 'settled by both',
  withdrawn: 'withdrawn',
};

export const disputeReasons = [
  'not-as-specified',
  'evidence-incomplete',
  'late',
  'damaged',
  'not-received',
  'not-answered',
  'payment-withheld',
  'other',
] as const;
export type DisputeReason = (typeof disputeReasons)[number];

export const disputeReasonText: Record<DisputeReason, string> = {
  'not-as-specified': 'Not as specified',
  'evidence-incomplete': 'Evidence is missing or incomplete',
  late: 'Late',
  damaged: 'Damaged',
  'not-received': 'Not received',
  'not-answered': 'The other side does not answer',
  'payment-withheld': 'Release is withheld without reason',
  other: 'Something else',
};
