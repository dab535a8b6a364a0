import { defineStateMachine } from './transitions.ts';

export const drawingStates = ['submitted', 'changes-requested', 'approved', 'superseded'] as const;
export type DrawingState = (typeof drawingStates)[number];

export const drawingMachine = defineStateMachine({
  name: 'drawing-revision',
  initial: 'submitted',
  states: drawingStates,
  transitions: [
    { event: 'request-changes', from: ['submitted'], to: 'changes-requested' },
    { event: 'approve', from: ['submitted'], to: 'approved' },
    { event: 'supersede', from: ['submitted'], to: 'superseded' },
  ],
});

export const drawingStateText: Record<DrawingState, string> = {
  submitted: 'submitted',
  'changes-requested': 'changes requested',
  approved: 'approved',
  superseded: 'replaced by a later one',
};

/**
 * Letters of drawing revisions: the alphabet without I, O, Q, S, X and Z, which are read as figures or
 * as other letters (the letters that ASME Y14.35 leaves out too; stated from memory).
 */
const letters = [...'ABCDEFGHJKLMNPRTUVWY'];

/** The letter of the n-th revision (0 = A); after Y comes AA, AB …. Valid for whole n ≥ 0. */
export function revisionLetter(n: number): string {
  if (!Number.isSafeInteger(n) || n < 0) throw new RangeError(`not a revision index: ${n}`);
  const last = letters[n % letters.length] ?? '';
  const before = Math.floor(n / letters.length);
  return before === 0 ? last : revisionLetter(before - 1) + last;
}
