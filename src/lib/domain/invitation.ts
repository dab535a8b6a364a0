import { defineStateMachine } from './transitions.ts';

/** An invitation to a company waits for the invited person, for as long as it is valid. */
export const invitationMachine = defineStateMachine({
  name: 'invitation',
  initial: 'open',
  states: ['open', 'accepted', 'withdrawn'],
  transitions: [
    { event: 'accept', from: ['open'], to: 'accepted' },
    { event: 'withdraw', from: ['open'], to: 'withdrawn' },
  ],
});
export type InvitationState = (typeof invitationMachine.states)[number];

export const invitationDays = 14;
