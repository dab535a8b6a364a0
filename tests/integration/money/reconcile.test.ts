import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { ledgerAccount, ledgerEntry, ledgerTx } from '../../../src/lib/server/db/schema/money.ts';
import { milestone } from '../../../src/lib/server/db/schema/orders.ts';
import { paymentOperation } from '../../../src/lib/server/db/schema/money.ts';
import {
  ledgerOverview,
  reconcile,
  reconcileAsAdmin,
  releaseMilestone,
  statementCsv,
  statementOf,
} from '../../../src/lib/server/money/index.ts';
import { moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast, type TestOrder } from '../../support/orders.ts';
import { refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;
let order: TestOrder;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
  order = await anOrder(world.db, cast);
  await bringTo(world, cast, order, 'drawing-approved');
});
afterEach(() => world.close());

const kinds = async () => (await reconcile(world.db)).differences.map((row) => row.kind);
/** Defects are seeded past the triggers, as a broken program or a person with the file could. */
async function pastTheTriggers(...statements: string[]): Promise<void> {
  await world.db.$client.executeMultiple(
    [
      'drop trigger ledger_tx_no_update',
      'drop trigger ledger_tx_no_delete',
      'drop trigger ledger_entry_no_update',
      'drop trigger ledger_entry_no_delete',
      ...statements,
    ].join(';\n'),
  );
}
const fundTx = async () => {
  const [row] = await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'fund'));
  if (!row) throw new Error('nothing is funded');
  return row;
};
const clearingOf = async (txId: string) => {
  const rows = await world.db
    .select({ entry: ledgerEntry, kind: ledgerAccount.kind })
    .from(ledgerEntry)
    .innerJoin(ledgerAccount, eq(ledgerAccount.id, ledgerEntry.accountId))
    .where(eq(ledgerEntry.txId, txId));
  return rows.filter((row) => row.kind === 'clearing').map((row) => row.entry);
};

describe('seeded defects of ten kinds are all found', () => {
  test('none: everything pairs', async () => {
    await releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
    await world.settle();
    expect(await reconcile(world.db)).toMatchObject({ balanced: true, compared: 2, differences: [] });
  });

  test('1 a movement at the service that is not booked', async () => {
    const [account] = (await world.stripe.v2.core.accounts.list()).data;
    await world.stripe.transfers.create({ amount: 500, currency: 'eur', destination: account?.id ?? '' });
    expect(await kinds()).toEqual(['not-booked']);
  });

  test('2 a booking that the service does not know', async () => {
    const tx = await fundTx();
    await pastTheTriggers(
      `update ledger_entry set balance_transaction_id = 'txn_of_nobody' where tx_id = '${tx.id}' and balance_transaction_id is not null`,
    );
    expect((await kinds()).sort()).toEqual(['not-at-service', 'not-booked']);
  });

  test('3 an amount that differs', async () => {
    const tx = await fundTx();
    const [gross] = (await clearingOf(tx.id)).filter((entry) => entry.debit > 0);
    await pastTheTriggers(
      `update ledger_entry set debit = debit + 1 where id = '${gross?.id ?? ''}'`,
      `update ledger_entry set credit = credit + 1 where tx_id = '${tx.id}' and credit > 20000`,
    );
    expect(await kinds()).toContain('amount-differs');
  });

  test('4 a fee that differs', async () => {
    const tx = await fundTx();
    const [fee] = (await clearingOf(tx.id)).filter((entry) => entry.credit > 0);
    await pastTheTriggers(
      `update ledger_entry set credit = credit + 1 where id = '${fee?.id ?? ''}'`,
      `update ledger_entry set debit = debit + 1 where tx_id = '${tx.id}' and debit > 0 and debit < 20000`,
    );
    expect(await kinds()).toEqual(['fee-differs']);
  });

  test('5 a currency that differs', async () => {
    const tx = await fundTx();
    await pastTheTriggers(`update ledger_tx set currency = 'USD' where id = '${tx.id}'`);
    expect(await kinds()).toEqual(['currency-differs']);
  });

  test('6 a movement that is booked twice', async () => {
    const tx = await fundTx();
    const copy = newId();
    await pastTheTriggers(
      `insert into ledger_tx select '${copy}', op_key || '-again', kind, order_id, milestone_id, currency, reason, object_id, at from ledger_tx where id = '${tx.id}'`,
      `insert into ledger_entry select id || '-again', '${copy}', account_id, milestone_id, debit, credit, balance_transaction_id from ledger_entry where tx_id = '${tx.id}'`,
    );
    expect(await kinds()).toContain('booked-twice');
  });

  test('7 a line of the clearing account without reference', async () => {
    const tx = await fundTx();
    await pastTheTriggers(`update ledger_entry set balance_transaction_id = null where tx_id = '${tx.id}'`);
    expect(await kinds()).toContain('without-reference');
  });

  test('8 a booking whose sides differ', async () => {
    const tx = await fundTx();
    await pastTheTriggers(
      `update ledger_entry set credit = credit - 1 where tx_id = '${tx.id}' and credit > 20000`,
    );
    expect(await kinds()).toContain('unbalanced');
  });

  test('9 a milestone whose state does not fit what is held', async () => {
    await world.db
      .update(milestone)
      .set({ money: 'released' })
      .where(eq(milestone.id, order.milestone.drawing));
    expect(await kinds()).toEqual(['held-differs']);
  });

  test('10 a call that is unclear for more than an hour', async () => {
    await world.control('POST', 'outage', { on: true });
    await releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
    await world.work();
    await world.control('POST', 'outage', { on: false });
    await world.db
      .update(paymentOperation)
      .set({ plannedAt: Date.now() - 3_700_000 })
      .where(eq(paymentOperation.kind, 'transfer'));
    expect(await kinds()).toEqual(['operation-stuck']);
  });
});

describe('who reads what', () => {
  test('the statement: both companies and the admin alike, nobody else', async () => {
    const buyer = await statementOf(world.db, cast.technician, order.orderId);
    expect(await statementOf(world.db, cast.builder, order.orderId)).toEqual(buyer);
    expect(await statementOf(world.db, cast.admin, order.orderId)).toEqual(buyer);
    expect(buyer.rows.map((row) => [row.paidIn, row.held])).toEqual([[23_800, 23_800]]);
    for (const stranger of [cast.outsider, cast.otherShop]) {
      expect(await refusalCode(statementOf(world.db, stranger, order.orderId))).toBe('not-found');
      expect(await refusalCode(statementCsv(world.db, stranger, order.orderId))).toBe('not-found');
    }
    expect(await refusalCode(statementOf(world.db, null, order.orderId))).toBe('sign-in-needed');
    // What the payment service charges the platform is not told to the parties.
    expect(JSON.stringify(buyer)).not.toContain('processor');
    expect(JSON.stringify(buyer)).not.toMatch(/\b(ch|tr|pi|re|cs_test|txn)_\w+/);
    const csv = await statementCsv(world.db, cast.purchaser, order.orderId);
    expect(csv.split('\r\n')[1]).toContain('Drawing,"Paid by the buyer, held by the platform",EUR,238.00');
  });

  test('ledger and reconciliation: the admin only', async () => {
    for (const actor of [cast.purchaser, cast.shopOwner, cast.outsider]) {
      expect(await refusalCode(reconcileAsAdmin(world.db, actor))).toBe('not-found');
      expect(await refusalCode(ledgerOverview(world.db, actor))).toBe('not-found');
    }
    expect((await reconcileAsAdmin(world.db, cast.admin)).balanced).toBe(true);
    const { accounts, run } = await ledgerOverview(world.db, cast.admin);
    expect(accounts.reduce((sum, row) => sum + row.debit - row.credit, 0)).toBe(0);
    expect(run?.balanced).toBe(true);
  });
});
