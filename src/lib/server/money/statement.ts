import { asc, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { ledgerTxText } from '../../domain/ledger.ts';
import type { MilestoneBooks } from '../../domain/ledger-rules.ts';
import { milestoneKindText, type MilestoneKind } from '../../domain/milestone-states.ts';
import type { Currency } from '../../domain/money.ts';
import { can, requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { ledgerAccount, ledgerEntry, ledgerTx } from '../db/schema/money.ts';
import { milestonesOf, orderNumberText, parties, unsafeOrder } from '../orders/index.ts';
import { csvOf } from './csv.ts';
import { booksOf } from './ledger.ts';

export interface StatementRow {
  id: string;
  at: number;
  what: string;
  milestone: string;
  /** Minor units; each 0 where it does not apply. */
  paidIn: number;
  paidOut: number;
  fee: number;
  refunded: number;
  chargedBack: number;
  /** Held for the order after this line. */
  held: number;
  /** Our booking; ids of the payment service never reach the parties. */
  reference: string;
}

export interface Statement {
  orderId: string;
  number: string;
  title: string;
  buyerName: string;
  fabricatorName: string;
  currency: Currency;
  total: number;
  rows: StatementRow[];
  milestones: ({ id: string; kind: MilestoneKind; amount: number } & MilestoneBooks)[];
}

/** The statement of an order, as both companies and the admin read it; fees of the payment service are the platform's. */
export async function statementOf(reader: Reader, actor: Actor | null, orderId: string): Promise<Statement> {
  const order = await unsafeOrder(reader, orderId);
  if (!can(actor, 'admin.view')) requireAccess(actor, 'order.view', parties(order));
  const milestones = await milestonesOf(reader, orderId);
  const txs = await reader
    .select()
    .from(ledgerTx)
    .where(eq(ledgerTx.orderId, orderId))
    .orderBy(asc(ledgerTx.at), asc(ledgerTx.id));
  const entries =
    txs.length === 0
      ? []
      : await reader
          .select({
            txId: ledgerEntry.txId,
            kind: ledgerAccount.kind,
            debit: ledgerEntry.debit,
            credit: ledgerEntry.credit,
          })
          .from(ledgerEntry)
          .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
          .where(
            inArray(
              ledgerEntry.txId,
              txs.map((row) => row.id),
            ),
          );
  let held = 0;
  const rows: StatementRow[] = [];
  for (const row of txs) {
    if (row.kind === 'charge-back-fee') continue;
    const own = entries.filter((entry) => entry.txId === row.id);
    const net = (kind: string) =>
      own.filter((entry) => entry.kind === kind).reduce((sum, entry) => sum + entry.debit - entry.credit, 0);
    // What the service kept as its own fee is the platform's cost and not part of the order.
    const clearing = net('clearing') + net('processor-fee');
    held -= net('held') + net('unallocated');
    const back = [
      'refund',
      'refund-failed',
      'surplus-refund',
      'surplus-refund-failed',
      'outside-refund',
    ].includes(row.kind);
    const bank = row.kind === 'charge-back' || row.kind === 'charge-back-won';
    rows.push({
      id: row.id,
      at: row.at,
      what: ledgerTxText[row.kind],
      milestone: nameOf(milestones, row.milestoneId),
      paidIn: row.kind === 'fund' || row.kind === 'surplus' ? clearing : 0,
      paidOut: row.kind === 'release' ? -clearing : 0,
      fee: row.kind === 'release' ? -net('platform-fee') : 0,
      refunded: back ? -clearing : 0,
      chargedBack: bank ? -clearing : 0,
      held,
      reference: row.id,
    });
  }
  const books = await booksOf(
    reader,
    milestones.map((m) => m.id),
  );
  const empty: MilestoneBooks = { funded: 0, released: 0, fees: 0, refunded: 0, chargedBack: 0, held: 0 };
  return {
    orderId,
    number: orderNumberText(order),
    title: order.title,
    buyerName: order.buyerName,
    fabricatorName: order.fabricatorName,
    currency: order.currency,
    total: order.totalAmount,
    rows,
    milestones: milestones.map((m) => ({
      id: m.id,
      kind: m.kind,
      amount: m.amount,
      ...(books.get(m.id) ?? empty),
    })),
  };
}

function nameOf(milestones: readonly { id: string; kind: MilestoneKind }[], id: string | null): string {
  const found = milestones.find((m) => m.id === id);
  return found ? milestoneKindText[found.kind] : '';
}

const amount = (minor: number) => (minor / 100).toFixed(2);

/** The statement as CSV (RFC 4180), amounts with a point; times in UTC. */
export async function statementCsv(reader: Reader, actor: Actor | null, orderId: string): Promise<string> {
  const statement = await statementOf(reader, actor, orderId);
  return csvOf(
    [
      'Time (UTC)',
      'Order',
      'Milestone',
      'What',
      'Currency',
      'Paid in',
      'Paid out',
      'Platform fee',
      'Refunded',
      'Charged back',
      'Held after',
      'Reference',
    ],
    statement.rows.map((row) => [
      new Date(row.at).toISOString(),
      statement.number,
      row.milestone,
      row.what,
      statement.currency,
      ...[row.paidIn, row.paidOut, row.fee, row.refunded, row.chargedBack, row.held].map(amount),
      row.reference,
    ]),
  );
}
