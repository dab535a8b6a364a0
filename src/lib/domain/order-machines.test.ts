import { describe, expect, test } from 'vitest';
import { disputeMachine, disputeStates, openDisputeStates } from './dispute-states.ts';
import { drawingMachine, revisionLetter } from './drawing-states.ts';
import { milestoneWord, moneyMachine, moneyStates, workMachine, workStates } from './milestone-states.ts';
import { orderMachine } from './order-states.ts';
import { pieceMachine, recordMachine } from './piece-states.ts';
import { eventsFrom, nextState } from './transitions.ts';

describe('money of a milestone', () => {
  test('leaves the platform from held only, and only once', () => {
    for (const event of ['release', 'refund', 'split'] as const) {
      const from = moneyStates.filter((state) => nextState(moneyMachine, state, event) !== undefined);
      expect(from).toEqual(['held']);
    }
  });

  test('is held by a payment only, or when the bank gives it back, or a refused payout is withdrawn', () => {
    const ways = moneyMachine.transitions.filter((t) => t.to === 'held').map((t) => t.event);
    expect(ways).toEqual(['hold', 'release-withdrawn', 'charge-back-won']);
  });

  test('in flight goes nowhere but to its own end', () => {
    expect(eventsFrom(moneyMachine, 'releasing')).toEqual(['released', 'release-withdrawn']);
    expect(eventsFrom(moneyMachine, 'refunding')).toEqual(['refunded']);
    expect(eventsFrom(moneyMachine, 'splitting')).toEqual(['split-done']);
  });

  test('released cannot be refunded, refunded cannot be released', () => {
    expect(nextState(moneyMachine, 'released', 'refund')).toBeUndefined();
    expect(nextState(moneyMachine, 'refunded', 'release')).toBeUndefined();
  });
});

test('work that was returned is open again; accepted and cancelled work is closed for good', () => {
  expect(nextState(workMachine, 'submitted', 'return')).toBe('open');
  expect(eventsFrom(workMachine, 'accepted')).toEqual([]);
  expect(eventsFrom(workMachine, 'cancelled')).toEqual([]);
});

test('a dispute ends by a decision that can no longer be appealed, by settling, or by being withdrawn', () => {
  const ends = disputeStates.filter((state) => eventsFrom(disputeMachine, state).length === 0);
  expect(ends).toEqual(['final', 'settled', 'withdrawn']);
  for (const state of openDisputeStates) expect(nextState(disputeMachine, state, 'settle')).toBe('settled');
  expect(nextState(disputeMachine, 'open', 'become-final')).toBeUndefined();
  expect(nextState(disputeMachine, 'appealed', 'become-final')).toBeUndefined();
});

test('closed orders, judged drawings and judged records stay as they are', () => {
  expect(eventsFrom(orderMachine, 'done')).toEqual([]);
  expect(eventsFrom(orderMachine, 'ended')).toEqual([]);
  for (const state of ['approved', 'changes-requested', 'superseded'] as const) {
    expect(eventsFrom(drawingMachine, state)).toEqual([]);
  }
  for (const state of ['accepted', 'returned', 'conceded'] as const) {
    expect(eventsFrom(recordMachine, state)).toEqual([]);
  }
  expect(eventsFrom(pieceMachine, 'delivered')).toEqual([]);
});

test('revision letters leave out I, O, Q, S, X and Z and go on with AA', () => {
  const letters = Array.from({ length: 22 }, (_, n) => revisionLetter(n));
  expect(letters.join(' ')).toBe('A B C D E F G H J K L M N P R T U V W Y AA AB');
  expect(() => revisionLetter(-1)).toThrow(RangeError);
  expect(() => revisionLetter(1.5)).toThrow(RangeError);
});

describe('the one word of a milestone', () => {
  test('is there for every combination, never empty, and never claims an escrow', () => {
    for (const work of workStates) {
      for (const money of moneyStates) {
        for (const dispute of [null, ...disputeStates]) {
          const { word } = milestoneWord(work, money, dispute);
          expect(word.length).toBeGreaterThan(3);
          expect(word.toLowerCase()).not.toContain('escrow');
        }
      }
    }
  });

  test.each([
    ['planned', 'unfunded', null, 'not funded'],
    ['planned', 'held', null, 'held, not started'],
    ['open', 'held', null, 'in work'],
    ['submitted', 'held', null, 'submitted'],
    ['submitted', 'held', 'open', 'disputed'],
    ['accepted', 'held', null, 'accepted, to release'],
    ['accepted', 'releasing', null, 'being paid out'],
    ['accepted', 'released', 'final', 'released'],
    ['cancelled', 'unfunded', null, 'cancelled'],
    ['cancelled', 'refunded', null, 'refunded'],
  ] as const)('%s, %s, dispute %s: %s', (work, money, dispute, word) => {
    expect(milestoneWord(work, money, dispute).word).toBe(word);
  });
});
