import { describe, expect, test } from 'vitest';
import { dayMs } from './dates.ts';
import { defaultOrderTerms } from './order-terms.ts';
import { groundsFor, presentWaits, waitsOf, type WaitFacts } from './waits.ts';

const awardedAt = Date.parse('2027-03-01T09:00:00Z'); // a Monday
const milestone = (
  kind: 'drawing' | 'build' | 'delivery',
  extra: Partial<WaitFacts['milestones'][number]> = {},
) => ({
  id: kind,
  kind,
  work: 'planned' as const,
  money: 'unfunded' as const,
  fundingAskedAt: null,
  openedAt: null,
  windowEndsAt: null,
  submittedAt: null,
  acceptedAt: null,
  ...extra,
});
const facts = (extra: Partial<WaitFacts> = {}, order: Partial<WaitFacts['order']> = {}): WaitFacts => ({
  order: {
    id: 'order',
    state: 'running',
    terms: defaultOrderTerms,
    buyerZone: 'Europe/Berlin',
    awardedAt,
    dueDate: null,
    clockStoppedAt: null,
    clockResumedAt: null,
    ...order,
  },
  milestones: [milestone('drawing'), milestone('build'), milestone('delivery')],
  drawing: null,
  misses: [],
  shipment: null,
  disputes: [],
  ...extra,
});
const kinds = (f: WaitFacts) => waitsOf(f).map((wait) => wait.kind);

test('an order not acknowledged waits three working days, to the end of the day in the buyer’s zone', () => {
  const [wait] = waitsOf(facts({}, { state: 'to-acknowledge' }));
  expect(wait?.kind).toBe('acknowledge');
  expect(new Date(wait?.dueAt ?? 0).toISOString()).toBe('2027-03-04T23:00:00.000Z');
  expect(groundsFor([wait!], 'buyer', (wait?.dueAt ?? 0) - 1)).toEqual([]);
  expect(groundsFor([wait!], 'buyer', wait?.dueAt ?? 0)).toEqual(['not-acknowledged']);
  expect(groundsFor([wait!], 'fabricator', wait?.dueAt ?? 0)).toEqual([]);
});

test('three working days from a Thursday leave out the weekend', () => {
  const thursday = Date.parse('2027-03-04T09:00:00Z');
  const [wait] = waitsOf(facts({}, { state: 'to-acknowledge', awardedAt: thursday }));
  expect(new Date(wait?.dueAt ?? 0).toISOString()).toBe('2027-03-09T23:00:00.000Z');
});

describe('funding', () => {
  const asked = facts({
    milestones: [
      milestone('drawing', { fundingAskedAt: awardedAt }),
      milestone('build'),
      milestone('delivery'),
    ],
  });

  test('ten days, then the fabricator may suspend; thirty, then either may end', () => {
    const waits = waitsOf(asked);
    expect(waits.map((wait) => [wait.kind, ((wait.dueAt ?? 0) - awardedAt) / dayMs])).toEqual([
      ['fund', 10],
      ['fund-end', 30],
    ]);
    expect(groundsFor(waits, 'fabricator', awardedAt + 10 * dayMs)).toEqual(['may-suspend']);
    expect(groundsFor(waits, 'buyer', awardedAt + 10 * dayMs)).toEqual([]);
    expect(groundsFor(waits, 'buyer', awardedAt + 30 * dayMs)).toEqual(['not-funded']);
    expect(groundsFor(waits, 'fabricator', awardedAt + 30 * dayMs)).toEqual(['may-suspend', 'not-funded']);
  });

  test('people see the step that is next', () => {
    expect(presentWaits(waitsOf(asked), awardedAt).map((wait) => wait.kind)).toEqual(['fund']);
    expect(presentWaits(waitsOf(asked), awardedAt + 11 * dayMs).map((wait) => wait.kind)).toEqual([
      'fund-end',
    ]);
  });
});

test('only the first milestone that is not closed is waited for, and windows of earlier ones beside it', () => {
  const windowEndsAt = awardedAt + 10 * dayMs;
  const done = { work: 'accepted' as const, money: 'held' as const, submittedAt: awardedAt, windowEndsAt };
  const f = facts({
    milestones: [
      milestone('drawing', done),
      milestone('build', { work: 'open', money: 'held', openedAt: awardedAt }),
      milestone('delivery'),
    ],
  });
  expect(kinds(f)).toEqual(['release', 'build-submit']);
});

test('while a dispute is open only its own clocks run', () => {
  const f = facts(
    {
      milestones: [
        milestone('drawing', {
          work: 'submitted',
          money: 'held',
          submittedAt: awardedAt,
          windowEndsAt: awardedAt + dayMs,
        }),
      ],
      disputes: [
        {
          id: 'd',
          state: 'open',
          openedBy: 'buyer',
          openedAt: awardedAt,
          answerDueAt: awardedAt + 7 * dayMs,
          decisionDueAt: awardedAt + 17 * dayMs,
          appealUntil: null,
          milestoneId: 'drawing',
        },
      ],
    },
    { clockStoppedAt: awardedAt },
  );
  expect(waitsOf(f).map((wait) => [wait.kind, wait.owner])).toEqual([['dispute-answer', 'fabricator']]);
});

test('after a dispute a drawing that waited before waits its days afresh', () => {
  const open = milestone('drawing', { work: 'open', money: 'held', openedAt: awardedAt });
  const drawing = { id: 'r', letter: 'A', submittedAt: awardedAt };
  const before = waitsOf(facts({ milestones: [open], drawing }))[0]?.dueAt ?? 0;
  const resumed = waitsOf(
    facts({ milestones: [open], drawing }, { clockResumedAt: awardedAt + 7 * dayMs }),
  )[0];
  expect((resumed?.dueAt ?? 0) - before).toBe(7 * dayMs);
});

test('an overdue build: fourteen days after the due date the buyer may end', () => {
  const f = facts(
    { milestones: [milestone('build', { work: 'open', money: 'held', openedAt: awardedAt })] },
    { dueDate: '2027-03-31' },
  );
  const waits = waitsOf(f);
  const end = waits.find((wait) => wait.kind === 'build-end')?.dueAt ?? 0;
  expect(groundsFor(waits, 'buyer', end - 1)).toEqual([]);
  expect(groundsFor(waits, 'buyer', end)).toEqual(['overdue']);
  expect(groundsFor(waits, 'fabricator', end)).toEqual([]);
});
