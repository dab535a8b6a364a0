/** Pure rules of the books, asserted on every write. */
import type { LedgerAccountKind, LedgerTxKind } from './ledger.ts';

export interface LedgerLineAmounts {
  debit: number;
  credit: number;
}

/** A booking that would break a rule of the books. It is refused, and the platform is alarmed. */
export class LedgerBreach extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'LedgerBreach';
  }
}

/** Each line has exactly one side above zero, and both sides of the booking are equal. */
export function assertBalanced(lines: readonly LedgerLineAmounts[]): void {
  if (lines.length < 2) throw new LedgerBreach('a booking needs two lines or more');
  let debit = 0n;
  let credit = 0n;
  for (const line of lines) {
    for (const side of [line.debit, line.credit]) {
      if (!Number.isSafeInteger(side) || side < 0) throw new LedgerBreach(`not a whole amount: ${side}`);
    }
    if ((line.debit === 0) === (line.credit === 0)) throw new LedgerBreach('a line has exactly one side');
    debit += BigInt(line.debit);
    credit += BigInt(line.credit);
  }
  if (debit !== credit) throw new LedgerBreach(`debit ${debit} differs from credit ${credit}`);
}

/** Sums per account kind and kind of booking, of one milestone. */
export interface LedgerSum {
  account: LedgerAccountKind;
  kind: LedgerTxKind;
  debit: number;
  credit: number;
}

export interface MilestoneBooks {
  /** Paid in by the buyer. */
  funded: number;
  /** Paid out to the fabricator. */
  released: number;
  /** Platform fee. */
  fees: number;
  refunded: number;
  /** Taken back by the bank while it was held. */
  chargedBack: number;
  /** What is still held, by the account itself. */
  held: number;
}

function total(
  sums: readonly LedgerSum[],
  account: LedgerAccountKind,
  kinds: readonly LedgerTxKind[],
  side: 'debit' | 'credit',
): number {
  const other = side === 'debit' ? 'credit' : 'debit';
  return sums
    .filter((sum) => sum.account === account && kinds.includes(sum.kind))
    .reduce((a, sum) => a + sum[side] - sum[other], 0);
}

/**
 * The books of a milestone. What went out is read from the accounts it went to, not from the held
 * account, so that the sum below is a real check.
 */
export function milestoneBooks(sums: readonly LedgerSum[]): MilestoneBooks {
  const held = sums.filter((sum) => sum.account === 'held').reduce((a, sum) => a + sum.credit - sum.debit, 0);
  const chargedBack = sums
    .filter((sum) => sum.account === 'held' && ['charge-back', 'charge-back-won'].includes(sum.kind))
    .reduce((a, sum) => a + sum.debit - sum.credit, 0);
  const outside = sums
    .filter((sum) => sum.account === 'held' && sum.kind === 'outside-refund')
    .reduce((a, sum) => a + sum.debit - sum.credit, 0);
  return {
    funded: sums
      .filter((sum) => sum.account === 'clearing' && sum.kind === 'fund')
      .reduce((a, sum) => a + sum.debit, 0),
    released: sums
      .filter((sum) => sum.account === 'payable' && sum.kind === 'release')
      .reduce((a, sum) => a + sum.credit, 0),
    fees: total(sums, 'platform-fee', ['release'], 'credit'),
    refunded: total(sums, 'clearing', ['refund', 'refund-failed'], 'credit') + outside,
    chargedBack,
    held,
  };
}

/** released + fees + refunded + charged back + held = funded, and nothing held is below zero. */
export function assertMilestoneBooks(books: MilestoneBooks): void {
  if (books.held < 0) throw new LedgerBreach(`held would be ${books.held}`);
  const out = books.released + books.fees + books.refunded + books.chargedBack;
  if (out + books.held !== books.funded) {
    throw new LedgerBreach(
      `released ${books.released} + fees ${books.fees} + refunded ${books.refunded} + charged back ${books.chargedBack} + held ${books.held} is not the funded ${books.funded}`,
    );
  }
}
