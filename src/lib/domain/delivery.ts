import { defineStateMachine } from './transitions.ts';

/**
 * Mails of the outbox and background jobs. Leases, tries and dead letters are the queue's own doing;
 * these tables say what an admin may do by hand, and the screens take their buttons from them.
 */
export const mailMachine = defineStateMachine({
  name: 'mail',
  initial: 'queued',
  states: ['queued', 'sending', 'sent', 'dead', 'parked'],
  transitions: [
    { event: 'claim', from: ['queued'], to: 'sending' },
    { event: 'acknowledge', from: ['sending'], to: 'sent' },
    { event: 'give-up', from: ['sending'], to: 'dead' },
    { event: 'retry', from: ['dead', 'parked'], to: 'queued' },
    { event: 'park', from: ['queued', 'dead'], to: 'parked' },
  ],
});
export type MailState = (typeof mailMachine.states)[number];

export const jobMachine = defineStateMachine({
  name: 'job',
  initial: 'queued',
  states: ['queued', 'running', 'done', 'dead', 'cancelled', 'parked'],
  transitions: [
    { event: 'claim', from: ['queued'], to: 'running' },
    { event: 'finish', from: ['running'], to: 'done' },
    { event: 'give-up', from: ['running'], to: 'dead' },
    { event: 'cancel', from: ['queued', 'running'], to: 'cancelled' },
    { event: 'retry', from: ['dead', 'parked'], to: 'queued' },
    { event: 'park', from: ['queued', 'dead'], to: 'parked' },
  ],
});
export type JobState = (typeof jobMachine.states)[number];

/** What an admin may do by hand. */
export const handEvents = ['retry', 'park'] as const;
export type HandEvent = (typeof handEvents)[number];
