import { defineStateMachine } from './transitions.ts';

export const pieceStates = [
  'planned',
  'measured',
  'missed',
  'accepted',
  'replaced',
  'shipped',
  'delivered',
  'cancelled',
] as const;
export type PieceState = (typeof pieceStates)[number];

/** One coil or fixture: measured by an as-built record, accepted with it, then on its way. */
export const pieceMachine = defineStateMachine({
  name: 'piece',
  initial: 'planned',
  states: pieceStates,
  transitions: [
    { event: 'measure', from: ['planned', 'missed', 'measured'], to: 'measured' },
    { event: 'miss', from: ['planned', 'missed', 'measured'], to: 'missed' },
    { event: 'return', from: ['measured'], to: 'planned' },
    { event: 'accept', from: ['measured', 'missed'], to: 'accepted' },
    { event: 'replace', from: ['planned', 'missed', 'measured'], to: 'replaced' },
    { event: 'ship', from: ['accepted'], to: 'shipped' },
    { event: 'deliver', from: ['shipped'], to: 'delivered' },
    { event: 'cancel', from: ['planned', 'measured', 'missed', 'accepted'], to: 'cancelled' },
  ],
});

export const pieceStateText: Record<PieceState, string> = {
  planned: 'not measured yet',
  measured: 'measured, within limits',
  missed: 'measured, outside limits',
  accepted: 'accepted',
  replaced: 'replaced by a new piece',
  shipped: 'on its way',
  delivered: 'delivered',
  cancelled: 'cancelled',
};

export const recordStates = ['submitted', 'returned', 'accepted', 'conceded'] as const;
export type RecordState = (typeof recordStates)[number];

export const recordMachine = defineStateMachine({
  name: 'as-built-record',
  initial: 'submitted',
  states: recordStates,
  transitions: [
    { event: 'return', from: ['submitted'], to: 'returned' },
    { event: 'accept', from: ['submitted'], to: 'accepted' },
    { event: 'concede', from: ['submitted'], to: 'conceded' },
  ],
});

export const verdicts = ['pass', 'pass-with-remark', 'fail'] as const;
export type Verdict = (typeof verdicts)[number];

export const verdictText: Record<Verdict, string> = {
  pass: 'pass',
  'pass-with-remark': 'pass with remark',
  fail: 'outside limits',
};
