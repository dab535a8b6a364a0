import { eq, inArray, sql } from 'drizzle-orm';
import type { LedgerAccountKind, LedgerTxKind } from '../../domain/ledger.ts';
import {
  assertBalanced,
  assertMilestoneBooks,
  LedgerBreach,
  milestoneBooks,
  type LedgerSum,
  type MilestoneBooks,
} from '../../domain/ledger-rules.ts';
import type { Currency } from '../../domain/money.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Reader, Tx } from '../db/index.ts';
import { ledgerAccount, ledgerEntry, ledgerTx } from '../db/schema/money.ts';

/** Names an account of the books. */
export type AccountRef =
  | { kind: 'clearing' | 'platform-fee' | 'processor-fee' | 'dispute-loss' | 'rounding' }
  | { kind: 'held'; milestoneId: string }
  | { kind: 'unallocated'; orderId: string }
  | { kind: 'payable' | 'receivable'; companyId: string };

export interface LedgerLine {
  account: AccountRef;
  debit?: number;
  credit?: number;
  /** The balance transaction at the payment service that a clearing line belongs to. */
  balanceTransactionId?: string | null;
}

export interface Booking {
  /** Makes a second booking of the same thing impossible. */
  opKey: string;
  kind: LedgerTxKind;
  orderId: string;
  milestoneId: string | null;
  currency: Currency;
  reason: string;
  objectId: string | null;
  lines: LedgerLine[];
}

export function accountKey(ref: AccountRef, currency: Currency): string {
  switch (ref.kind) {
    case 'held':
      return `held:${ref.milestoneId}`;
    case 'unallocated':
      return `unallocated:${ref.orderId}`;
    case 'payable':
    case 'receivable':
      return `${ref.kind}:${ref.companyId}:${currency}`;
    default:
      return `${ref.kind}:${currency}`;
  }
}

async function accountId(tx: Tx, ref: AccountRef, currency: Currency): Promise<string> {
  const key = accountKey(ref, currency);
  await tx
    .insert(ledgerAccount)
    .values({
      id: newId(),
      key,
      kind: ref.kind,
      currency,
      milestoneId: 'milestoneId' in ref ? ref.milestoneId : null,
      orderId: 'orderId' in ref ? ref.orderId : null,
      companyId: 'companyId' in ref ? ref.companyId : null,
    })
    .onConflictDoNothing({ target: ledgerAccount.key });
  const [row] = await tx
    .select({ id: ledgerAccount.id, currency: ledgerAccount.currency })
    .from(ledgerAccount)
    .where(eq(ledgerAccount.key, key));
  if (!row) throw new Error(`no account ${key}`);
  if (row.currency !== currency)
    throw new LedgerBreach(`${currency} booked on an account of ${row.currency}`);
  return row.id;
}

/** Signed balance of an account: credits minus debits. */
export async function accountBalance(reader: Reader, key: string): Promise<number> {
  const [row] = await reader
    .select({
      balance: sql<number>`coalesce(sum(${ledgerEntry.credit}) - sum(${ledgerEntry.debit}), 0)`,
    })
    .from(ledgerEntry)
    .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
    .where(eq(ledgerAccount.key, key));
  return row?.balance ?? 0;
}

/** What is held for a milestone, by its account. */
export function heldBalance(reader: Reader, milestoneId: string): Promise<number> {
  return accountBalance(reader, `held:${milestoneId}`);
}

export async function booksOf(
  reader: Reader,
  milestoneIds: readonly string[],
): Promise<Map<string, MilestoneBooks>> {
  const found = new Map<string, LedgerSum[]>(milestoneIds.map((id) => [id, []]));
  if (milestoneIds.length > 0) {
    const rows = await reader
      .select({
        milestoneId: ledgerEntry.milestoneId,
        account: ledgerAccount.kind,
        kind: ledgerTx.kind,
        debit: sql<number>`sum(${ledgerEntry.debit})`,
        credit: sql<number>`sum(${ledgerEntry.credit})`,
      })
      .from(ledgerEntry)
      .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
      .innerJoin(ledgerTx, eq(ledgerTx.id, ledgerEntry.txId))
      .where(inArray(ledgerEntry.milestoneId, [...milestoneIds]))
      .groupBy(ledgerEntry.milestoneId, ledgerAccount.kind, ledgerTx.kind);
    for (const { milestoneId, ...sum } of rows) if (milestoneId) found.get(milestoneId)?.push(sum);
  }
  return new Map([...found].map(([id, sums]) => [id, milestoneBooks(sums)]));
}

/** Accounts that a booking must not leave below zero (credit side). */
const neverNegative: readonly LedgerAccountKind[] = ['held', 'unallocated', 'payable'];

async function assertAfter(tx: Tx, booking: Booking): Promise<void> {
  for (const { account } of booking.lines) {
    const balance = await accountBalance(tx, accountKey(account, booking.currency));
    if (neverNegative.includes(account.kind) && balance < 0) {
      throw new LedgerBreach(`${account.kind} would be ${balance}`);
    }
    if (account.kind === 'rounding' && balance !== 0) throw new LedgerBreach(`rounding would be ${balance}`);
  }
  if (booking.milestoneId) {
    const books = (await booksOf(tx, [booking.milestoneId])).get(booking.milestoneId);
    if (books) assertMilestoneBooks(books);
  }
}

/**
 * Books in double entry, in the caller's transaction. Returns false when this operation is booked
 * already (nothing is written then). Throws LedgerBreach when a rule of the books would be broken: the
 * caller's transaction is then rolled back as a whole.
 */
export async function postLedger(tx: Tx, booking: Booking): Promise<boolean> {
  const lines = booking.lines
    .map((line) => ({ ...line, debit: line.debit ?? 0, credit: line.credit ?? 0 }))
    .filter((line) => line.debit !== 0 || line.credit !== 0);
  assertBalanced(lines);
  const txId = newId();
  const [made] = await tx
    .insert(ledgerTx)
    .values({
      id: txId,
      opKey: booking.opKey,
      kind: booking.kind,
      orderId: booking.orderId,
      milestoneId: booking.milestoneId,
      currency: booking.currency,
      reason: booking.reason,
      objectId: booking.objectId,
      at: await businessNow(tx),
    })
    .onConflictDoNothing({ target: ledgerTx.opKey })
    .returning({ id: ledgerTx.id });
  if (!made) return false;
  const rows = [];
  for (const line of lines) {
    rows.push({
      id: newId(),
      txId,
      accountId: await accountId(tx, line.account, booking.currency),
      milestoneId: booking.milestoneId,
      debit: line.debit,
      credit: line.credit,
      balanceTransactionId: line.account.kind === 'clearing' ? (line.balanceTransactionId ?? null) : null,
    });
  }
  await tx.insert(ledgerEntry).values(rows);
  await assertAfter(tx, booking);
  return true;
}

/** Whether something is booked under this key. */
export async function isBooked(reader: Reader, opKey: string): Promise<boolean> {
  const [row] = await reader.select({ id: ledgerTx.id }).from(ledgerTx).where(eq(ledgerTx.opKey, opKey));
  return row !== undefined;
}
