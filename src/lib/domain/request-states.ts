import { defineStateMachine } from './transitions.ts';

export const requestStates = [
  'draft',
  'posted',
  'closed',
  'awarded',
  'done',
  'ended',
  're-opened',
  'withdrawn',
  'lapsed',
] as const;
export type RequestState = (typeof requestStates)[number];

/** The life of a request. `award`, `finish`, `end` and `re-open` are set off by bids and orders. */
export const requestMachine = defineStateMachine({
  name: 'request',
  initial: 'draft',
  states: requestStates,
  transitions: [
    { event: 'post', from: ['draft'], to: 'posted' },
    { event: 'close', from: ['posted'], to: 'closed' },
    { event: 'award', from: ['posted', 'closed', 're-opened'], to: 'awarded' },
    { event: 'finish', from: ['awarded'], to: 'done' },
    { event: 'end', from: ['awarded'], to: 'ended' },
    { event: 're-open', from: ['awarded'], to: 're-opened' },
    { event: 'withdraw', from: ['draft', 'posted', 'closed', 're-opened'], to: 'withdrawn' },
    { event: 'lapse', from: ['closed', 're-opened'], to: 'lapsed' },
  ],
});

export type RequestEvent = (typeof requestMachine)['transitions'][number]['event'];

/** A closed request that nobody awarded lapses this many days after its closing. */
export const lapseAfterDays = 90;
/** Bidders are reminded this long before bids close. */
export const closesSoonHours = 48;

export const requestStateText: Record<RequestState, string> = {
  draft: 'Draft',
  posted: 'Open for bids',
  closed: 'Bids closed',
  awarded: 'Awarded',
  done: 'Done',
  ended: 'Ended',
  're-opened': 'Open for award again',
  withdrawn: 'Withdrawn',
  lapsed: 'Lapsed',
};
