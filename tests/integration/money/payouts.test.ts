import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { dayMs } from '../../../src/lib/domain/dates.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import {
  ledgerEntry,
  ledgerTx,
  moneyAlarm,
  payoutAccount,
  paymentOperation,
} from '../../../src/lib/server/db/schema/money.ts';
import { answerOffer, offerSettlement, openDispute } from '../../../src/lib/server/disputes/index.ts';
import {
  accountBalance,
  booksOf,
  executeOperation,
  fundingOf,
  heldBalance,
  latestOperation,
  moveHeldMoney,
  openOnboarding,
  payoutReady,
  reconcile,
  recoverOperations,
  releaseMilestone,
  releasePurpose,
  retryMoney,
  viewPayoutAccount,
} from '../../../src/lib/server/money/index.ts';
import { orderFor } from '../../../src/lib/server/orders/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import {
  aCast,
  anOrder,
  bringTo,
  readyPayout,
  type Cast,
  type OrderOptions,
  type TestOrder,
} from '../../support/orders.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;
let accountId: string;
const later = Number.MAX_SAFE_INTEGER;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  accountId = await readyPayout(world, cast);
});
afterEach(() => world.close());

async function heldDrawing(options: OrderOptions = {}): Promise<TestOrder> {
  const order = await anOrder(world.db, cast, options);
  await bringTo(world, cast, order, 'drawing-approved');
  return order;
}
const release = (order: TestOrder) =>
  releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
const state = async (order: TestOrder) => {
  const row = await milestoneRow(world.db, order.milestone.drawing);
  return [row.money, row.attention];
};

/** A dispute settled at once, which splits what is held. */
async function split(order: TestOrder, releasePart: number): Promise<void> {
  const held = await heldBalance(world.db, order.milestone.drawing);
  const { disputeId } = await openDispute(world.db, cast.purchaser, {
    milestoneId: order.milestone.drawing,
    reason: 'other',
    complaintAbout: 'Drawing',
    pieceId: null,
    amountClaimed: 1,
    text: 'Half of it is missing.',
    fileIds: [],
    commandId: newId(),
  });
  const { offerId } = await offerSettlement(world.db, cast.purchaser, {
    disputeId,
    release: releasePart,
    refund: held - releasePart,
    note: '',
    commandId: newId(),
  });
  await answerOffer(world.db, cast.shopOwner, { offerId, answer: 'accept' });
}

describe('26 balance insufficient for the transfer', () => {
  test('a payout names its charge and need not wait for the balance', async () => {
    const order = await heldDrawing();
    // The platform's own money is gone; what is held is still on its way to the balance.
    await world.control('POST', 'balance', { amount: -100_000 });
    await release(order);
    await world.settle();
    expect(await state(order)).toEqual(['released', null]);
    const [transfer] = (await world.stripe.transfers.list()).data;
    expect(transfer?.source_transaction).toBe((await fundingOf(world.db, order.milestone.drawing))?.chargeId);
  });

  test('a refusal for want of balance is told, stays in flight, and can be tried again', async () => {
    const order = await heldDrawing();
    await world.control('POST', 'balance', { amount: -100_000 });
    await release(order);
    const op = await latestOperation(world.db, releasePurpose(order.milestone.drawing));
    await world.db
      .update(paymentOperation)
      .set({ request: { ...op?.request, sourceChargeId: null } })
      .where(eq(paymentOperation.id, op?.id ?? ''));
    expect(await executeOperation(world.db, op?.id ?? '')).toBe('failed');
    expect(await state(order)).toEqual(['releasing', 'balance-insufficient']);
    expect(await heldBalance(world.db, order.milestone.drawing)).toBe(23_800);
    const again = { milestoneId: order.milestone.drawing };
    expect(await refusalCode(retryMoney(world.db, cast.purchaser, again))).toBe('not-found');
    await retryMoney(world.db, cast.admin, again);
    expect(await refusalCode(retryMoney(world.db, cast.admin, again))).toBe('state-conflict');
    await world.settle();
    expect(await state(order)).toEqual(['released', null]);
    expect((await world.stripe.transfers.list()).data).toHaveLength(1);
  });
});

describe('27 payee restricted', () => {
  test('the payout is refused, the money stays held, both are told, and it goes out once the account is in order', async () => {
    const order = await heldDrawing();
    await world.control('POST', 'webhooks', { paused: true });
    await world.control('POST', `accounts/${accountId}/restrict`);
    await release(order);
    await world.work();
    expect(await state(order)).toEqual(['releasing', 'payee-restricted']);
    expect(await heldBalance(world.db, order.milestone.drawing)).toBe(23_800);
    const told = world.mails.filter((mail) => mail.subject.includes('payout account needs attention'));
    expect(told.map((mail) => mail.to)).toContain(cast.purchaser.email);
    expect(told.map((mail) => mail.to)).toContain(cast.shopOwner.email);
    await world.control('POST', 'webhooks', { paused: false });
    await world.settle();
    expect(await payoutReady(world.db, cast.fabricatorId)).toBe(false);
    await world.control('POST', `accounts/${accountId}/activate`);
    await world.settle();
    expect(await state(order)).toEqual(['released', null]);
    expect((await world.stripe.transfers.list()).data).toHaveLength(1);
  });

  test('the end of the window keeps the money held, tells both once, and releases later by itself', async () => {
    const order = await heldDrawing();
    await world.control('POST', `accounts/${accountId}/restrict`);
    await world.settle();
    expect((await refusal(release(order))).code).toBe('payout-not-ready');
    await world.advance(11 * dayMs);
    await world.settle();
    await world.advance(2 * 3_600_000);
    await world.settle();
    expect(await state(order)).toEqual(['held', 'payee-restricted']);
    await world.control('POST', `accounts/${accountId}/activate`);
    await world.settle();
    expect(await state(order)).toEqual(['released', null]);
  });
});

describe('28 onboarding link used or expired', () => {
  test('a used link sends the person back for a fresh one, and asking again gives one', async () => {
    const fresh = await world.db.select().from(payoutAccount);
    expect(fresh).toHaveLength(1);
    const open = () =>
      openOnboarding(world.db, cast.shopOwner, { companyId: cast.fabricatorId, country: 'DE' }).then(
        (l) => l.url,
      );
    const first = await open();
    expect((await fetch(first, { redirect: 'manual' })).status).toBe(200);
    const used = await fetch(first, { redirect: 'manual' });
    expect(used.status).toBe(303);
    expect(used.headers.get('location')).toContain(`/companies/${cast.fabricatorId}/payouts?again=1`);
    const second = await open();
    expect(second).not.toBe(first);
    await world.control('POST', 'clock', { advanceSeconds: 3600 });
    expect((await fetch(second, { redirect: 'manual' })).status).toBe(303);
    expect((await fetch(await open(), { redirect: 'manual' })).status).toBe(200);
    expect((await world.stripe.v2.core.accounts.list()).data).toHaveLength(1);
  });

  test('only the owner of the fabricator company opens it', async () => {
    const input = { companyId: cast.fabricatorId, country: 'DE' };
    expect(await refusalCode(openOnboarding(world.db, cast.builder, input))).toBe('not-allowed');
    expect(await refusalCode(openOnboarding(world.db, cast.otherShop, input))).toBe('not-found');
    expect(await refusalCode(viewPayoutAccount(world.db, cast.estimator, cast.fabricatorId))).toBe(
      'not-allowed',
    );
    expect(await refusalCode(viewPayoutAccount(world.db, cast.outsider, cast.fabricatorId))).toBe(
      'not-found',
    );
  });
});

test('29 second leg of a split fails: resumes, legs sum to the held amount', async () => {
  const order = await heldDrawing();
  await world.control('POST', 'faults', { kind: 'error-500', times: 2, method: 'POST', path: '/v1/refunds' });
  await split(order, 10_001);
  await world.work();
  expect((await state(order))[0]).toBe('splitting');
  expect((await world.stripe.transfers.list()).data).toHaveLength(1);
  expect(await heldBalance(world.db, order.milestone.drawing)).toBe(23_800 - 10_001);
  for (let round = 0; round < 5; round += 1) await recoverOperations(world.db, { now: later });
  await world.settle();
  expect(await state(order)).toEqual(['split', null]);
  const books = (await booksOf(world.db, [order.milestone.drawing])).get(order.milestone.drawing);
  expect((books?.released ?? 0) + (books?.fees ?? 0) + (books?.refunded ?? 0)).toBe(23_800);
  expect((await world.stripe.refunds.list()).data.map((refund) => refund.amount)).toEqual([23_800 - 10_001]);
});

test.each([
  { net: 33_333, tax: 6_333, freight: 777, part: 1 },
  { net: 33_333, tax: 0, freight: 0, part: 3_333 },
  { net: 99_999, tax: 18_999, freight: 1, part: 7_777 },
  { net: 100_001, tax: 1, freight: 12_345, part: 20_000 },
])('30 rounding of fees and partial refunds (%o)', async ({ part, ...prices }) => {
  const order = await heldDrawing(prices);
  const held = await heldBalance(world.db, order.milestone.drawing);
  await split(order, part);
  await world.settle();
  const books = (await booksOf(world.db, [order.milestone.drawing])).get(order.milestone.drawing);
  expect(books).toMatchObject({ funded: held, held: 0, refunded: held - part });
  expect((books?.released ?? 0) + (books?.fees ?? 0)).toBe(part);
  const exact = (((prices.net - prices.freight) * 0.2 * part) / held) * 0.05;
  expect(Math.abs((books?.fees ?? 0) - exact)).toBeLessThan(1);
  expect(await accountBalance(world.db, 'rounding:EUR')).toBe(0);
  expect((await reconcile(world.db)).differences).toEqual([]);
});

describe('31 refund after release', () => {
  test('is not possible through the product: nothing is held any more', async () => {
    const order = await heldDrawing();
    await release(order);
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.drawing);
    const full = await orderFor(world.db, cast.purchaser, 'order.view', order.orderId);
    const refund = transact(world.db, (tx) =>
      moveHeldMoney(tx, cast.purchaser, full, row, { release: 0, refund: row.amount }),
    );
    expect(await refusalCode(refund)).toBe('state-conflict');
  });

  test('made at the payment service itself, it is booked as owed by the fabricator, and a person is told', async () => {
    const order = await heldDrawing();
    await release(order);
    await world.settle();
    const funding = await fundingOf(world.db, order.milestone.drawing);
    await world.stripe.refunds.create({ charge: funding?.chargeId ?? '', amount: 5_000 });
    await world.settle();
    expect(await state(order)).toEqual(['released', 'refund-after-release']);
    expect(await accountBalance(world.db, `receivable:${cast.fabricatorId}:EUR`)).toBe(-5_000);
    expect((await world.db.select().from(moneyAlarm)).map((row) => row.kind)).toContain('outside-refund');
    expect((await reconcile(world.db)).differences).toEqual([]);
  });
});

test('the ledger takes no change and no deletion', async () => {
  await heldDrawing();
  await expect(world.db.delete(ledgerEntry)).rejects.toThrow();
  await expect(world.db.update(ledgerEntry).set({ debit: 1 })).rejects.toThrow();
  await expect(world.db.update(ledgerTx).set({ reason: 'x' })).rejects.toThrow();
  await expect(world.db.delete(ledgerTx)).rejects.toThrow();
});
