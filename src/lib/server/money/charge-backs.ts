import { eq } from 'drizzle-orm';
import { platformFee } from '../../domain/fees.ts';
import type { BalanceTransaction, Dispute, Payments } from '../adapters/payments.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { chargeBack, ledgerAccount, ledgerEntry, ledgerTx, paymentSession } from '../db/schema/money.ts';
import {
  moveMoney,
  setAttention,
  unsafeMilestone,
  unsafeOrder,
  type MilestoneRow,
  type OrderRow,
} from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { heldBalance, isBooked, postLedger, type AccountRef, type LedgerLine } from './ledger.ts';
import { releasePurpose } from './close-money.ts';
import { latestOperation } from './operations.ts';
import { tellChargeBack } from './tell-money.ts';

type Before = (typeof chargeBack.$inferSelect)['moneyBefore'];

/** Money in flight has to land first: the job tries again. */
export class MoneyInFlight extends Error {
  constructor(milestoneId: string) {
    super(`the money of milestone ${milestoneId} is in flight`);
    this.name = 'MoneyInFlight';
  }
}

async function landed(tx: Tx, row: MilestoneRow): Promise<MilestoneRow> {
  if (row.money === 'releasing') {
    const op = await latestOperation(tx, releasePurpose(row.id));
    // A payout that was refused for certain is taken back; any other may still arrive.
    if (op?.state !== 'failed') throw new MoneyInFlight(row.id);
    await moveMoney(tx, 'system', row, 'release-withdrawn', { releaseAmount: 0 });
    return unsafeMilestone(tx, row.id);
  }
  if (row.money === 'refunding' || row.money === 'splitting') throw new MoneyInFlight(row.id);
  return row;
}

function beforeOf(row: MilestoneRow): Before {
  if (row.money === 'released' || row.money === 'split' || row.money === 'refunded') return row.money;
  return 'held';
}

/** Where the loss falls: on what is held; after a release on the fabricator, less the fee given back. */
async function lossLines(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  before: Before,
  amount: number,
): Promise<LedgerLine[]> {
  if (before === 'held') {
    const held = Math.min(amount, await heldBalance(tx, row.id));
    return [
      { account: { kind: 'held', milestoneId: row.id }, debit: held },
      { account: { kind: 'dispute-loss' }, debit: amount - held },
    ];
  }
  const paid = before === 'refunded' ? 0 : Math.min(amount, row.releaseAmount);
  const fee = platformFee({
    amount: row.amount,
    feeBase: row.feeBase,
    release: paid,
    basisPoints: order.feeBasisPoints,
  });
  return [
    { account: { kind: 'receivable', companyId: order.fabricatorCompanyId }, debit: paid - fee },
    { account: { kind: 'platform-fee' }, debit: fee },
    { account: { kind: 'dispute-loss' }, debit: amount - paid },
  ];
}

async function bookWithdrawal(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  before: Before,
  dispute: Dispute,
  booked: BalanceTransaction,
): Promise<void> {
  const amount = -booked.amount;
  await postLedger(tx, {
    opKey: `charge-back:${booked.id}`,
    kind: 'charge-back',
    orderId: order.id,
    milestoneId: row.id,
    currency: booked.currency,
    reason: `Charge-back ${dispute.reason}`,
    objectId: dispute.id,
    lines: [
      ...(await lossLines(tx, order, row, before, amount)),
      { account: { kind: 'clearing' }, credit: amount, balanceTransactionId: booked.id },
    ],
  });
  await bookCosts(tx, order, dispute, booked);
}

async function bookCosts(
  tx: Tx,
  order: OrderRow,
  dispute: Dispute,
  booked: BalanceTransaction,
): Promise<void> {
  if (booked.fee === 0) return;
  const cost: AccountRef = { kind: 'dispute-loss' };
  const paid = booked.fee > 0;
  await postLedger(tx, {
    opKey: `charge-back-fee:${booked.id}`,
    kind: 'charge-back-fee',
    orderId: order.id,
    milestoneId: null,
    currency: booked.currency,
    reason: 'Cost of a charge-back',
    objectId: dispute.id,
    lines: [
      paid ? { account: cost, debit: booked.fee } : { account: cost, credit: -booked.fee },
      {
        account: { kind: 'clearing' },
        ...(paid ? { credit: booked.fee } : { debit: -booked.fee }),
        balanceTransactionId: booked.id,
      },
    ],
  });
}

/** A won dispute gives back exactly what its withdrawal took, account by account. */
async function bookReturn(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  dispute: Dispute,
  booked: BalanceTransaction,
) {
  const taken = await tx
    .select({ key: ledgerAccount.key, kind: ledgerAccount.kind, entry: ledgerEntry, account: ledgerAccount })
    .from(ledgerEntry)
    .innerJoin(ledgerTx, eq(ledgerTx.id, ledgerEntry.txId))
    .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
    .where(eq(ledgerTx.objectId, dispute.id));
  const lines: LedgerLine[] = taken
    .filter(({ entry, kind }) => entry.milestoneId === row.id && kind !== 'clearing' && entry.debit > 0)
    .map(({ entry, account }) => ({ account: refOf(account), credit: entry.debit }));
  const total = lines.reduce((sum, line) => sum + (line.credit ?? 0), 0);
  if (total !== booked.amount) {
    await raiseAlarm(tx, {
      key: `charge-back-return:${booked.id}`,
      kind: 'charge-back-return-differs',
      orderId: order.id,
      milestoneId: row.id,
      objectId: dispute.id,
      detail: `The bank returned ${booked.amount}; taken was ${total}.`,
    });
    return;
  }
  await postLedger(tx, {
    opKey: `charge-back-won:${booked.id}`,
    kind: 'charge-back-won',
    orderId: order.id,
    milestoneId: row.id,
    currency: booked.currency,
    reason: 'The bank returned the payment',
    objectId: `${dispute.id}:returned`,
    lines: [
      { account: { kind: 'clearing' }, debit: booked.amount, balanceTransactionId: booked.id },
      ...lines,
    ],
  });
  await bookCosts(tx, order, dispute, booked);
}

function refOf(account: typeof ledgerAccount.$inferSelect): AccountRef {
  switch (account.kind) {
    case 'held':
      return { kind: 'held', milestoneId: account.milestoneId ?? '' };
    case 'unallocated':
      return { kind: 'unallocated', orderId: account.orderId ?? '' };
    case 'payable':
    case 'receivable':
      return { kind: account.kind, companyId: account.companyId ?? '' };
    default:
      return { kind: account.kind };
  }
}

/** Brings the books in line with a charge-back as the service tells it now. */
export async function syncChargeBack(db: Database, payments: Payments, disputeId: string): Promise<void> {
  const dispute = await payments.retrieveDispute(disputeId);
  await transact(db, async (tx) => {
    const [session] = await tx
      .select()
      .from(paymentSession)
      .where(eq(paymentSession.chargeId, dispute.chargeId));
    if (!session || session.state !== 'paid') {
      await raiseAlarm(tx, {
        key: `charge-back-unknown:${dispute.id}`,
        kind: 'charge-back',
        objectId: dispute.id,
        detail: `A charge-back of ${dispute.amount} ${dispute.currency} on ${dispute.chargeId}, which holds no milestone.`,
      });
      return;
    }
    await apply(tx, dispute, session.milestoneId);
  });
}

async function apply(tx: Tx, dispute: Dispute, milestoneId: string): Promise<void> {
  const found = await unsafeMilestone(tx, milestoneId);
  const order = await unsafeOrder(tx, found.orderId);
  const [known] = await tx.select().from(chargeBack).where(eq(chargeBack.id, dispute.id));
  const withdrawals = dispute.balanceTransactions.filter((row) => row.amount < 0);
  const returns = dispute.balanceTransactions.filter((row) => row.amount > 0);
  let row = found;
  let before: Before = known?.moneyBefore ?? 'held';
  if (!known) {
    row = await landed(tx, found);
    before = beforeOf(row);
    await tx.insert(chargeBack).values({
      id: dispute.id,
      orderId: order.id,
      milestoneId,
      chargeId: dispute.chargeId,
      amount: dispute.amount,
      currency: dispute.currency,
      state: 'open',
      moneyBefore: before,
      openedAt: await businessNow(tx),
    });
    await raiseAlarm(tx, {
      key: `charge-back:${dispute.id}`,
      kind: 'charge-back',
      orderId: order.id,
      milestoneId,
      objectId: dispute.id,
      detail: `Charge-back of ${dispute.amount} ${dispute.currency} (${dispute.reason}, ${dispute.status}); money was ${before}.`,
    });
  }
  for (const booked of withdrawals) {
    if (await isBooked(tx, `charge-back:${booked.id}`)) continue;
    await bookWithdrawal(tx, order, row, before, dispute, booked);
    if (before !== 'refunded') {
      await moveMoney(tx, 'system', row, 'charge-back', { attention: 'charge-back' });
      row = await unsafeMilestone(tx, milestoneId);
    }
    await tellChargeBack(tx, order, row, 'opened', -booked.amount);
  }
  await close(tx, order, row, dispute, before, returns, known?.state ?? 'open');
}

async function close(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  dispute: Dispute,
  before: Before,
  returns: BalanceTransaction[],
  state: 'open' | 'won' | 'lost',
): Promise<void> {
  if (dispute.status === 'won' && state === 'open' && returns.length > 0) {
    for (const booked of returns) await bookReturn(tx, order, row, dispute, booked);
    const event = {
      held: 'charge-back-won',
      released: 'charge-back-won-after-release',
      split: 'charge-back-won-after-split',
      refunded: null,
    }[before] as 'charge-back-won' | null;
    if (event && row.money === 'charged-back') await moveMoney(tx, 'system', row, event, { attention: null });
    await finish(tx, dispute, 'won');
    await tellChargeBack(tx, order, row, 'won', dispute.amount);
  }
  if (dispute.status === 'lost' && state === 'open') {
    await finish(tx, dispute, 'lost');
    await setAttention(tx, row.id, 'charge-back');
    await tellChargeBack(tx, order, row, 'lost', dispute.amount);
  }
}

async function finish(tx: Tx, dispute: Dispute, state: 'won' | 'lost'): Promise<void> {
  await tx
    .update(chargeBack)
    .set({ state, closedAt: await businessNow(tx) })
    .where(eq(chargeBack.id, dispute.id));
}
