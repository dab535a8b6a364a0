import { and, desc, eq, inArray, isNull, ne, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dayMs } from '../../domain/dates.ts';
import { requireAccess } from '../access/index.ts';
import type { BalanceTransaction, Payments } from '../adapters/payments.ts';
import { businessNow, realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Database, Reader } from '../db/index.ts';
import {
  ledgerAccount,
  ledgerEntry,
  ledgerTx,
  paymentOperation,
  reconciliationRun,
} from '../db/schema/money.ts';
import { milestone } from '../db/schema/orders.ts';
import { booksOf } from './ledger.ts';
import { unfinishedStates } from './operations.ts';
import { paymentService } from './service.ts';

export const differenceKinds = [
  /** At the service, not in the books. */
  'not-booked',
  /** In the books, not at the service. */
  'not-at-service',
  'amount-differs',
  'fee-differs',
  'currency-differs',
  'booked-twice',
  /** A line of the clearing account that names no balance transaction. */
  'without-reference',
  /** A booking whose two sides differ. */
  'unbalanced',
  /** What is held in the books does not fit the state of the milestone. */
  'held-differs',
  /** An outside call that is still unclear after an hour. */
  'operation-stuck',
] as const;
export type DifferenceKind = (typeof differenceKinds)[number];

export interface Difference {
  kind: DifferenceKind;
  id: string;
  detail: string;
}

/** Movements of the platform's own money at the service: no order has to do with them. */
const ownMovements = ['topup', 'payout', 'payout_failure', 'stripe_fee', 'tax_fee'];

interface ClearingSum {
  balanceTransactionId: string | null;
  txKind: string;
  currency: string;
  txIds: string;
  gross: number;
  fee: number;
  net: number;
}

async function clearingSums(reader: Reader): Promise<ClearingSum[]> {
  const isFee = sql`${ledgerTx.kind} in ('fund', 'surplus') and ${ledgerEntry.credit} > 0`;
  return reader
    .select({
      balanceTransactionId: ledgerEntry.balanceTransactionId,
      txKind: sql<string>`min(${ledgerTx.kind})`,
      currency: sql<string>`min(${ledgerTx.currency})`,
      txIds: sql<string>`group_concat(distinct ${ledgerTx.id})`,
      gross: sql<number>`sum(case when ${isFee} or ${ledgerTx.kind} = 'charge-back-fee' then 0 else ${ledgerEntry.debit} - ${ledgerEntry.credit} end)`,
      fee: sql<number>`sum(case when ${isFee} or ${ledgerTx.kind} = 'charge-back-fee' then ${ledgerEntry.credit} - ${ledgerEntry.debit} else 0 end)`,
      net: sql<number>`sum(${ledgerEntry.debit} - ${ledgerEntry.credit})`,
    })
    .from(ledgerEntry)
    .innerJoin(ledgerTx, eq(ledgerTx.id, ledgerEntry.txId))
    .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
    .where(eq(ledgerAccount.kind, 'clearing'))
    .groupBy(sql`coalesce(${ledgerEntry.balanceTransactionId}, ${ledgerEntry.id})`);
}

function comparePair(theirs: BalanceTransaction, ours: ClearingSum): Difference[] {
  const found: Difference[] = [];
  const add = (kind: DifferenceKind, detail: string) => found.push({ kind, id: theirs.id, detail });
  if (ours.currency !== theirs.currency)
    add('currency-differs', `service ${theirs.currency}, books ${ours.currency}`);
  // A charge-back's booking and its cost are two bookings of one balance transaction; everything else is one.
  const bookings = ours.txIds.split(',').length;
  if (bookings > (theirs.category === 'dispute' && theirs.fee !== 0 ? 2 : 1)) {
    add('booked-twice', `${bookings} bookings name it`);
    return found;
  }
  if (ours.gross !== theirs.amount) add('amount-differs', `service ${theirs.amount}, books ${ours.gross}`);
  if (ours.fee !== theirs.fee) add('fee-differs', `service ${theirs.fee}, books ${ours.fee}`);
  return found;
}

async function unbalanced(reader: Reader): Promise<Difference[]> {
  const rows = await reader
    .select({
      id: ledgerEntry.txId,
      difference: sql<number>`sum(${ledgerEntry.debit}) - sum(${ledgerEntry.credit})`,
    })
    .from(ledgerEntry)
    .groupBy(ledgerEntry.txId)
    .having(sql`sum(${ledgerEntry.debit}) <> sum(${ledgerEntry.credit})`);
  return rows.map((row) => ({
    kind: 'unbalanced',
    id: row.id,
    detail: `debit − credit = ${row.difference}`,
  }));
}

async function heldDifferences(reader: Reader): Promise<Difference[]> {
  const rows = await reader.select().from(milestone).where(ne(milestone.money, 'unfunded'));
  const found: Difference[] = [];
  for (let at = 0; at < rows.length; at += 500) {
    const part = rows.slice(at, at + 500);
    const books = await booksOf(
      reader,
      part.map((row) => row.id),
    );
    for (const row of part) {
      const held = books.get(row.id)?.held ?? 0;
      // Where two legs are on their way, one may have landed.
      const inFlight = row.money === 'splitting' || row.money === 'refunding';
      const expected = row.money === 'held' || row.money === 'releasing' ? row.amount : 0;
      const partly = row.money === 'held' && row.attention === 'refund-after-release';
      if (!inFlight && !partly && held !== expected) {
        found.push({
          kind: 'held-differs',
          id: row.id,
          detail: `milestone is ${row.money}, books hold ${held}, expected ${expected}`,
        });
      }
    }
  }
  return found;
}

async function stuckOperations(reader: Reader): Promise<Difference[]> {
  const rows = await reader
    .select()
    .from(paymentOperation)
    .where(inArray(paymentOperation.state, [...unfinishedStates]));
  return rows
    .filter((row) => row.plannedAt < realNow() - dayMs / 24)
    .map((row) => ({
      kind: 'operation-stuck',
      id: row.id,
      detail: `${row.kind} ${row.purpose} is ${row.state} after ${row.attempts} tries: ${row.lastError ?? ''}`,
    }));
}

/**
 * Pairs every balance transaction of the payment service with the lines of the clearing account by its
 * id, and checks the books against themselves and against the milestones. Reports; repairs nothing.
 */
export async function reconcile(
  db: Database,
  options: { payments?: Payments } = {},
): Promise<{ compared: number; balanced: boolean; differences: Difference[] }> {
  const payments = options.payments ?? paymentService();
  const theirs: BalanceTransaction[] = [];
  for await (const row of payments.listBalanceTransactions()) {
    if (!ownMovements.includes(row.type)) theirs.push(row);
  }
  const sums = await clearingSums(db);
  const ours = new Map(
    sums.flatMap((row) => (row.balanceTransactionId ? [[row.balanceTransactionId, row]] : [])),
  );
  const differences: Difference[] = [];
  for (const row of theirs) {
    const pair = ours.get(row.id);
    if (pair) differences.push(...comparePair(row, pair));
    else {
      differences.push({
        kind: 'not-booked',
        id: row.id,
        detail: `${row.type} of ${row.amount} ${row.currency} (${row.sourceId ?? 'no source'})`,
      });
    }
  }
  const known = new Set(theirs.map((row) => row.id));
  for (const row of sums) {
    if (row.balanceTransactionId === null) {
      differences.push({ kind: 'without-reference', id: row.txIds, detail: `${row.net} ${row.currency}` });
    } else if (!known.has(row.balanceTransactionId)) {
      differences.push({
        kind: 'not-at-service',
        id: row.balanceTransactionId,
        detail: `${row.net} ${row.currency} by ${row.txIds}`,
      });
    }
  }
  differences.push(...(await unbalanced(db)), ...(await heldDifferences(db)), ...(await stuckOperations(db)));
  const result = { compared: theirs.length, balanced: differences.length === 0, differences };
  await db.insert(reconciliationRun).values({
    id: newId(),
    at: await businessNow(db),
    balanced: result.balanced,
    compared: result.compared,
    differences,
  });
  return result;
}

export async function reconcileAsAdmin(db: Database, actor: Actor | null) {
  requireAccess(actor, 'admin.operate');
  return reconcile(db);
}

/** What the ledger page of the admin shows. */
export async function ledgerOverview(reader: Reader, actor: Actor | null) {
  requireAccess(actor, 'admin.view');
  const accounts = await reader
    .select({
      kind: ledgerAccount.kind,
      currency: ledgerAccount.currency,
      accounts: sql<number>`count(distinct ${ledgerAccount.id})`,
      debit: sql<number>`coalesce(sum(${ledgerEntry.debit}), 0)`,
      credit: sql<number>`coalesce(sum(${ledgerEntry.credit}), 0)`,
    })
    .from(ledgerAccount)
    .leftJoin(ledgerEntry, eq(ledgerEntry.accountId, ledgerAccount.id))
    .groupBy(ledgerAccount.currency, ledgerAccount.kind)
    .orderBy(ledgerAccount.currency, ledgerAccount.kind);
  const operations = await reader
    .select()
    .from(paymentOperation)
    .where(inArray(paymentOperation.state, [...unfinishedStates]))
    .orderBy(desc(paymentOperation.plannedAt))
    .limit(100);
  const refused = await reader
    .select()
    .from(paymentOperation)
    .where(and(eq(paymentOperation.state, 'failed'), isNull(paymentOperation.knownAt)))
    .orderBy(desc(paymentOperation.plannedAt))
    .limit(50);
  const [run] = await reader.select().from(reconciliationRun).orderBy(desc(reconciliationRun.at)).limit(1);
  const shown = (row: typeof paymentOperation.$inferSelect) => ({
    id: row.id,
    kind: row.kind,
    purpose: row.purpose,
    state: row.state,
    attempts: row.attempts,
    orderId: row.orderId,
    errorCode: row.errorCode,
    lastError: row.lastError,
    plannedAt: row.plannedAt,
  });
  return { accounts, operations: operations.map(shown), refused: refused.map(shown), run: run ?? null };
}
