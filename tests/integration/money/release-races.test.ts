import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import type { Database } from '../../../src/lib/server/db/index.ts';
import { dispute } from '../../../src/lib/server/db/schema/disputes.ts';
import { ledgerTx, paymentOperation } from '../../../src/lib/server/db/schema/money.ts';
import { openDispute } from '../../../src/lib/server/disputes/index.ts';
import { heldBalance, releaseMilestone } from '../../../src/lib/server/money/index.ts';
import { answerEnd, proposeEnd } from '../../../src/lib/server/workflows/end-proposals.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast, type TestOrder } from '../../support/orders.ts';

let world: MoneyWorld;
let cast: Cast;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
});
afterEach(() => world.close());

async function aHeldDrawing(): Promise<TestOrder> {
  const order = await anOrder(world.db, cast);
  await bringTo(world, cast, order, 'drawing-approved');
  return order;
}

const won = (results: PromiseSettledResult<unknown>[]) =>
  results.filter((r) => r.status === 'fulfilled').length;
const release = (db: Database, order: TestOrder, actor = cast.purchaser) =>
  releaseMilestone(db, actor, { milestoneId: order.milestone.drawing });

test('23 double click, two tabs, two members release', async () => {
  const order = await aHeldDrawing();
  const other = world.test.openAnother();
  const clicks = Array.from({ length: 50 }, (_, n) =>
    release(n % 3 === 0 ? other : world.db, order, n % 2 === 0 ? cast.purchaser : cast.purchaser2),
  );
  const results = await Promise.allSettled(clicks);
  expect(won(results)).toBe(1);
  await world.settle();
  expect((await milestoneRow(world.db, order.milestone.drawing)).money).toBe('released');
  expect((await world.stripe.transfers.list()).data).toHaveLength(1);
  expect(await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'release'))).toHaveLength(1);
  const transfers = await world.db
    .select()
    .from(paymentOperation)
    .where(eq(paymentOperation.kind, 'transfer'));
  expect(transfers).toHaveLength(1);
});

test('24 release against dispute at the same moment', async () => {
  const other = world.test.openAnother();
  const order = await aHeldDrawing();
  const claim = (db: Database) =>
    openDispute(db, cast.shopOwner, {
      milestoneId: order.milestone.drawing,
      reason: 'other',
      complaintAbout: 'Drawing',
      pieceId: null,
      amountClaimed: 100,
      text: 'A stop.',
      fileIds: [],
      commandId: newId(),
    });
  const results = await Promise.allSettled([
    release(world.db, order),
    claim(other),
    release(other, order),
    claim(world.db),
  ]);
  expect(won(results)).toBe(1);
  const row = await milestoneRow(world.db, order.milestone.drawing);
  const disputes = await world.db.select().from(dispute);
  // Either the money is on its way and there is no dispute, or it is held and there is one.
  expect([row.money, disputes.length]).toEqual(row.money === 'held' ? ['held', 1] : ['releasing', 0]);
  await world.settle();
  expect((await world.stripe.transfers.list()).data).toHaveLength(row.money === 'held' ? 0 : 1);
});

test('25 release against refund', async () => {
  const other = world.test.openAnother();
  for (const releaseFirst of [true, false]) {
    const order = await aHeldDrawing();
    const held = await heldBalance(world.db, order.milestone.drawing);
    const { proposalId } = await proposeEnd(world.db, cast.shopOwner, {
      orderId: order.orderId,
      parts: [{ milestoneId: order.milestone.drawing, release: 0, refund: held }],
      workInHand: '',
      reason: 'We cannot build it.',
      commandId: newId(),
    });
    const refund = () => answerEnd(other, cast.purchaser, { proposalId, answer: 'accept' });
    const acts = releaseFirst
      ? [() => release(world.db, order), refund]
      : [refund, () => release(world.db, order)];
    const results = await Promise.allSettled(acts.map((act) => act()));
    expect(won(results)).toBe(1);
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.drawing);
    const transfers = (await world.stripe.transfers.list({ transfer_group: order.orderId })).data.length;
    expect([row.money, transfers]).toEqual(row.money === 'released' ? ['released', 1] : ['refunded', 0]);
    expect(await heldBalance(world.db, row.id)).toBe(0);
  }
});
