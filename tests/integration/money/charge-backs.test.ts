import { copyFileSync } from 'node:fs';
import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { dateIn, dayMs } from '../../../src/lib/domain/dates.ts';
import { openDatabase } from '../../../src/lib/server/db/index.ts';
import { chargeBack, ledgerTx, moneyAlarm } from '../../../src/lib/server/db/schema/money.ts';
import {
  accountBalance,
  backfillEvents,
  fundingOf,
  fundMilestone,
  heldBalance,
  latestOperation,
  recoverOperations,
  reconcile,
  refundPurpose,
  releaseMilestone,
  retryMoney,
} from '../../../src/lib/server/money/index.ts';
import { windowEnd } from '../../../src/lib/server/orders/index.ts';
import { answerEnd, proposeEnd } from '../../../src/lib/server/workflows/end-proposals.ts';
import { drainJobs } from '../../../src/lib/server/workflows/run-worker.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import {
  aCast,
  anOrder,
  approveDrawing,
  bringTo,
  fund,
  readyPayout,
  type Cast,
  type TestOrder,
} from '../../support/orders.ts';
import { refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
});
afterEach(() => world.close());

async function heldDrawing(card?: string): Promise<TestOrder> {
  const order = await anOrder(world.db, cast);
  await bringTo(world, cast, order, 'acknowledged');
  await fund(world, cast, order.milestone.drawing, card);
  await approveDrawing(world.db, cast, order);
  return order;
}
const state = async (order: TestOrder) => {
  const row = await milestoneRow(world.db, order.milestone.drawing);
  return [row.money, row.attention];
};
const takeBack = async (order: TestOrder) => {
  const funding = await fundingOf(world.db, order.milestone.drawing);
  const { id } = await world.control<{ id: string }>('POST', 'disputes', { charge: funding?.chargeId });
  await world.settle();
  return id;
};
const release = (order: TestOrder) =>
  releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
/** All held money of the order goes back by agreement. */
async function refundAll(order: TestOrder): Promise<void> {
  const held = await heldBalance(world.db, order.milestone.drawing);
  const { proposalId } = await proposeEnd(world.db, cast.shopOwner, {
    orderId: order.orderId,
    parts: [{ milestoneId: order.milestone.drawing, release: 0, refund: held }],
    workInHand: '',
    reason: 'We cannot build it.',
    commandId: newId(),
  });
  await answerEnd(world.db, cast.purchaser, { proposalId, answer: 'accept' });
}

test('32 chargeback after release', async () => {
  const order = await heldDrawing();
  await release(order);
  await world.settle();
  const id = await takeBack(order);
  expect(await state(order)).toEqual(['charged-back', 'charge-back']);
  // The fabricator owes what was paid out; the platform gives its fee back and bears the cost.
  expect(await accountBalance(world.db, `receivable:${cast.fabricatorId}:EUR`)).toBe(-(23_800 - 950));
  expect(await accountBalance(world.db, 'platform-fee:EUR')).toBe(0);
  expect(await accountBalance(world.db, 'dispute-loss:EUR')).toBe(-2_000);
  expect((await reconcile(world.db)).differences).toEqual([]);
  await world.control('POST', `disputes/${id}/win`);
  await world.settle();
  expect(await state(order)).toEqual(['released', null]);
  expect(await accountBalance(world.db, `receivable:${cast.fabricatorId}:EUR`)).toBe(0);
  expect(await accountBalance(world.db, 'platform-fee:EUR')).toBe(950);
  expect((await reconcile(world.db)).differences).toEqual([]);
});

describe('33 chargeback while held', () => {
  test('the held money is gone, both are told, and a release is not possible', async () => {
    const order = await heldDrawing();
    const id = await takeBack(order);
    expect(await state(order)).toEqual(['charged-back', 'charge-back']);
    expect(await heldBalance(world.db, order.milestone.drawing)).toBe(0);
    expect(await refusalCode(release(order))).toBe('state-conflict');
    const told = world.mails.filter((mail) => mail.subject.includes('taken back')).map((mail) => mail.to);
    expect(told).toContain(cast.purchaser.email);
    expect(told).toContain(cast.shopOwner.email);
    await world.control('POST', `disputes/${id}/lose`);
    await world.settle();
    expect((await world.db.select().from(chargeBack))[0]?.state).toBe('lost');
    expect((await state(order))[0]).toBe('charged-back');
    expect((await reconcile(world.db)).differences).toEqual([]);
  });

  test('won, the money is held again and can be released', async () => {
    const order = await heldDrawing();
    const id = await takeBack(order);
    await world.control('POST', `disputes/${id}/win`);
    await world.settle();
    expect(await state(order)).toEqual(['held', null]);
    expect(await heldBalance(world.db, order.milestone.drawing)).toBe(23_800);
    await release(order);
    await world.settle();
    expect((await state(order))[0]).toBe('released');
    expect((await reconcile(world.db)).differences).toEqual([]);
  });
});

describe('34 refund pending, refund failed later', () => {
  test('a pending refund counts as refunded only once it has succeeded', async () => {
    const order = await heldDrawing('4000000000007726');
    await refundAll(order);
    await world.work();
    expect((await state(order))[0]).toBe('refunding');
    await world.control('POST', 'clock', { advanceSeconds: 10 });
    await world.settle();
    expect((await state(order))[0]).toBe('refunded');
    expect((await reconcile(world.db)).differences).toEqual([]);
  });

  test('a refund that waits for the platform’s balance goes out once there is enough', async () => {
    const order = await heldDrawing();
    await world.control('POST', 'balance', { amount: -100_000 });
    await refundAll(order);
    await world.settle();
    expect((await state(order))[0]).toBe('refunding');
    await world.control('POST', 'balance', { amount: 100_000 });
    await world.settle();
    expect((await state(order))[0]).toBe('refunded');
  });

  test('a refund that comes back is held again, told, and tried anew under a new key', async () => {
    const order = await heldDrawing('4000000000005126');
    await refundAll(order);
    await world.work();
    await world.control('POST', 'clock', { advanceSeconds: 10 });
    await world.settle();
    expect(await state(order)).toEqual(['refunding', 'refund-failed']);
    expect(await heldBalance(world.db, order.milestone.drawing)).toBe(23_800);
    expect((await world.db.select().from(moneyAlarm)).map((row) => row.kind)).toContain('refund-failed');
    expect((await reconcile(world.db)).differences).toEqual([]);
    await retryMoney(world.db, cast.admin, { milestoneId: order.milestone.drawing });
    const op = await latestOperation(world.db, refundPurpose(order.milestone.drawing));
    expect(op?.generation).toBe(2);
    await world.settle();
    const refunds = (await world.stripe.refunds.list()).data;
    expect(new Set(refunds.map((refund) => refund.id)).size).toBe(2);
  });
});

describe('35 clock skew, daylight saving, month end', () => {
  test.each([
    ['Europe/Berlin', '2027-03-25T10:00:00Z', '2027-04-04'],
    ['Europe/Berlin', '2027-10-25T10:00:00Z', '2027-11-04'],
    ['America/New_York', '2027-03-10T10:00:00Z', '2027-03-20'],
    ['Europe/Berlin', '2027-01-31T22:59:59Z', '2027-02-10'],
    ['Europe/Berlin', '2027-01-31T23:00:00Z', '2027-02-11'],
    ['Pacific/Auckland', '2027-02-28T12:00:00Z', '2027-03-11'],
  ])('a window of ten days in %s from %s ends with the day %s', (zone, from, day) => {
    const end = windowEnd({ buyerZone: zone, inspectionDays: 10 }, Date.parse(from));
    expect(dateIn(zone, end - 1)).toBe(day);
    expect(dateIn(zone, end)).not.toBe(day);
  });

  test('a service whose clock is a day off still funds and releases', async () => {
    await world.control('POST', 'clock', { offsetSeconds: 86_400 });
    const order = await heldDrawing();
    await release(order);
    await world.settle();
    expect((await state(order))[0]).toBe('released');
  });

  test('a business clock that jumps far ends each window once', async () => {
    const order = await heldDrawing();
    await world.advance(400 * dayMs);
    await world.settle();
    await world.settle();
    expect((await state(order))[0]).toBe('released');
    expect(await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'release'))).toHaveLength(1);
  });
});

describe('36 database restored from an older backup', () => {
  async function backUp(): Promise<ReturnType<typeof openDatabase>> {
    const copy = `${world.test.file}.backup`;
    await world.db.$client.execute('PRAGMA wal_checkpoint(TRUNCATE)');
    copyFileSync(world.test.file, copy);
    return openDatabase(`file:${copy}`);
  }
  const noMail = async () => undefined;
  const moneyIn = async (db: ReturnType<typeof openDatabase>, id: string) =>
    (await milestoneRow(db, id)).money;

  test('a release made since is found by the events of the service and taken over', async () => {
    const order = await heldDrawing();
    const old = await backUp();
    await release(order);
    await world.settle();
    expect(await moneyIn(old, order.milestone.drawing)).toBe('held');
    await backfillEvents(old);
    await drainJobs(old, { send: noMail });
    expect(await moneyIn(old, order.milestone.drawing)).toBe('released');
    expect(await heldBalance(old, order.milestone.drawing)).toBe(0);
    expect((await world.stripe.transfers.list()).data).toHaveLength(1);
    expect((await reconcile(old)).differences).toEqual([]);
    old.$client.close();
  });

  test('released once more by the restored side, it is the same transfer', async () => {
    const order = await heldDrawing();
    const old = await backUp();
    await release(order);
    await world.settle();
    await releaseMilestone(old, cast.purchaser, { milestoneId: order.milestone.drawing });
    await recoverOperations(old);
    expect(await moneyIn(old, order.milestone.drawing)).toBe('released');
    expect((await world.stripe.transfers.list()).data).toHaveLength(1);
    old.$client.close();
  });

  test('a payment made since is found and held', async () => {
    const order = await anOrder(world.db, cast);
    await bringTo(world, cast, order, 'acknowledged');
    await fundMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
    const old = await backUp();
    await world.pay(order.milestone.drawing);
    await world.settle();
    await backfillEvents(old);
    await drainJobs(old, { send: noMail });
    expect(await moneyIn(old, order.milestone.drawing)).toBe('held');
    old.$client.close();
  });
});
