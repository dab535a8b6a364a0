import { expect, test } from 'vitest';
import { defineStateMachine, eventsFrom, nextState } from './transitions.ts';

const lamp = {
  name: 'lamp',
  initial: 'off',
  states: ['off', 'on', 'broken'],
  transitions: [
    { event: 'switch-on', from: ['off'], to: 'on' },
    { event: 'switch-off', from: ['on'], to: 'off' },
    { event: 'drop', from: ['off', 'on'], to: 'broken' },
  ],
} as const;

test('a sound table tells where events lead and which are possible', () => {
  const machine = defineStateMachine(lamp);
  expect(nextState(machine, 'off', 'switch-on')).toBe('on');
  expect(nextState(machine, 'broken', 'switch-on')).toBeUndefined();
  expect(eventsFrom(machine, 'on')).toEqual(['switch-off', 'drop']);
  expect(eventsFrom(machine, 'broken')).toEqual([]);
});

test('a table with unknown, unreachable or doubled entries stops the program at start', () => {
  const define = (change: object) => () =>
    defineStateMachine<string, string>({ ...lamp, ...change } as never);
  expect(define({ transitions: [...lamp.transitions, { event: 'paint', from: ['red'], to: 'on' }] })).toThrow(
    /paint names the unknown state red/,
  );
  expect(define({ transitions: [...lamp.transitions, { event: 'paint', from: ['on'], to: 'red' }] })).toThrow(
    /unknown state red/,
  );
  expect(define({ states: [...lamp.states, 'stolen'] })).toThrow(/stolen cannot be reached/);
  expect(define({ initial: 'dim' })).toThrow(/unknown initial state/);
  expect(define({ transitions: [...lamp.transitions, { event: 'drop', from: ['on'], to: 'off' }] })).toThrow(
    /drop from on is there twice/,
  );
});
