import { defineStateMachine } from './transitions.ts';

export const orderStates = ['to-acknowledge', 'running', 'suspended', 'done', 'ended'] as const;
export type OrderState = (typeof orderStates)[number];

export const orderMachine = defineStateMachine({
  name: 'order',
  initial: 'to-acknowledge',
  states: orderStates,
  transitions: [
    { event: 'acknowledge', from: ['to-acknowledge'], to: 'running' },
    { event: 'suspend', from: ['running'], to: 'suspended' },
    { event: 'resume', from: ['suspended'], to: 'running' },
    { event: 'finish', from: ['running', 'suspended'], to: 'done' },
    { event: 'end', from: ['to-acknowledge', 'running', 'suspended'], to: 'ended' },
  ],
});
export type OrderEvent = (typeof orderMachine)['transitions'][number]['event'];

/** Orders that can still change; at most one per request. */
export const liveOrderStates: readonly OrderState[] = ['to-acknowledge', 'running', 'suspended'];

export const orderStateText: Record<OrderState, string> = {
  'to-acknowledge': 'to acknowledge',
  running: 'running',
  suspended: 'suspended',
  done: 'done',
  ended: 'ended',
};
