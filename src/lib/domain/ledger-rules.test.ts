import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  assertBalanced,
  assertMilestoneBooks,
  LedgerBreach,
  milestoneBooks,
  type LedgerSum,
} from './ledger-rules.ts';

describe('a booking', () => {
  test.each([
    ['one line', [{ debit: 1, credit: 0 }]],
    [
      'both sides of a line',
      [
        { debit: 1, credit: 1 },
        { debit: 1, credit: 1 },
      ],
    ],
    [
      'an empty line',
      [
        { debit: 0, credit: 0 },
        { debit: 0, credit: 0 },
      ],
    ],
    [
      'sides that differ',
      [
        { debit: 2, credit: 0 },
        { debit: 0, credit: 1 },
      ],
    ],
    [
      'a negative amount',
      [
        { debit: -1, credit: 0 },
        { debit: 0, credit: -1 },
      ],
    ],
    [
      'a fraction',
      [
        { debit: 0.5, credit: 0 },
        { debit: 0, credit: 0.5 },
      ],
    ],
    [
      'an unsafe integer',
      [
        { debit: 2 ** 53, credit: 0 },
        { debit: 0, credit: 2 ** 53 },
      ],
    ],
  ])('with %s is refused', (_name, lines) => {
    expect(() => assertBalanced(lines)).toThrow(LedgerBreach);
  });

  test('whose debits make its credits is taken', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 1e9 }), { minLength: 1, maxLength: 10 }), (debits) => {
        const credit = debits.reduce((a, b) => a + b, 0);
        expect(() =>
          assertBalanced([...debits.map((debit) => ({ debit, credit: 0 })), { debit: 0, credit }]),
        ).not.toThrow();
        expect(() =>
          assertBalanced([
            ...debits.map((debit) => ({ debit, credit: 0 })),
            { debit: 0, credit: credit + 1 },
          ]),
        ).toThrow(LedgerBreach);
      }),
    );
  });
});

/** Sums as the books have them after these amounts have moved. */
function sums(m: {
  funded: number;
  released: number;
  fee: number;
  refunded: number;
  taken: number;
}): LedgerSum[] {
  const line = (account: LedgerSum['account'], kind: LedgerSum['kind'], debit: number, credit: number) => ({
    account,
    kind,
    debit,
    credit,
  });
  return [
    line('clearing', 'fund', m.funded, 25),
    line('held', 'fund', 0, m.funded),
    line('processor-fee', 'fund', 25, 0),
    line('held', 'release', m.released + m.fee, 0),
    line('payable', 'release', m.released, m.released),
    line('platform-fee', 'release', 0, m.fee),
    line('clearing', 'release', 0, m.released),
    line('held', 'refund', m.refunded, 0),
    line('clearing', 'refund', 0, m.refunded),
    line('held', 'charge-back', m.taken, 0),
    line('clearing', 'charge-back', 0, m.taken),
  ];
}

describe('the books of a milestone', () => {
  const moves = { funded: 1000, released: 380, fee: 20, refunded: 100, taken: 50 };

  test('are read from where the money went', () => {
    expect(milestoneBooks(sums(moves))).toEqual({
      funded: 1000,
      released: 380,
      fees: 20,
      refunded: 100,
      chargedBack: 50,
      held: 450,
    });
    expect(() => assertMilestoneBooks(milestoneBooks(sums(moves)))).not.toThrow();
  });

  test('refuse more going out than came in', () => {
    expect(() => assertMilestoneBooks(milestoneBooks(sums({ ...moves, refunded: 600 })))).toThrow(
      LedgerBreach,
    );
  });

  test('refuse a payout that the held account does not know of', () => {
    const wrong = sums(moves).map((sum) =>
      sum.account === 'payable' ? { ...sum, credit: sum.credit + 1 } : sum,
    );
    expect(() => assertMilestoneBooks(milestoneBooks(wrong))).toThrow(LedgerBreach);
  });

  test('a refund that came back is held again', () => {
    const back: LedgerSum[] = [
      ...sums(moves),
      { account: 'clearing', kind: 'refund-failed', debit: 100, credit: 0 },
      { account: 'held', kind: 'refund-failed', debit: 0, credit: 100 },
    ];
    expect(milestoneBooks(back)).toMatchObject({ refunded: 0, held: 550 });
    expect(() => assertMilestoneBooks(milestoneBooks(back))).not.toThrow();
  });
});
