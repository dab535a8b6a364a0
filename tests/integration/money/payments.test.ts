import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { ledgerTx, paymentSession } from '../../../src/lib/server/db/schema/money.ts';
import { milestone } from '../../../src/lib/server/db/schema/orders.ts';
import { accountBalance, fundMilestone, heldBalance } from '../../../src/lib/server/money/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast, type TestOrder } from '../../support/orders.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;
let order: TestOrder;
let drawing: string;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
  order = await anOrder(world.db, cast);
  drawing = order.milestone.drawing;
  await bringTo(world, cast, order, 'acknowledged');
});
afterEach(() => world.close());

const openPage = (actor = cast.purchaser) => fundMilestone(world.db, actor, { milestoneId: drawing });
const sessions = () => world.db.select().from(paymentSession).where(eq(paymentSession.milestoneId, drawing));
const payAt = (sessionId: string | null) => world.control('POST', `sessions/${sessionId ?? ''}/pay`, {});

describe('19 buyer pays twice: one open session, second payment refunded once', () => {
  test('two clicks, two tabs and two members get the same page', async () => {
    const other = world.test.openAnother();
    const pages = await Promise.all([
      openPage(),
      openPage(cast.purchaser2),
      fundMilestone(other, cast.purchaser, { milestoneId: drawing }),
    ]);
    expect(new Set(pages.map((page) => page.url)).size).toBe(1);
    expect(await sessions()).toHaveLength(1);
    expect((await world.stripe.checkout.sessions.list()).data).toHaveLength(1);
  });

  test('a second payment is booked apart and refunded once', async () => {
    await openPage();
    // The first page was given up here while the buyer still had it open.
    await world.db
      .update(paymentSession)
      .set({ state: 'lapsed' })
      .where(eq(paymentSession.milestoneId, drawing));
    await world.db.update(milestone).set({ money: 'unfunded' }).where(eq(milestone.id, drawing));
    await openPage();
    const [first, second] = await sessions();
    await payAt(first?.sessionId ?? null);
    await payAt(second?.sessionId ?? null);
    await world.settle();
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('held');
    expect(await heldBalance(world.db, drawing)).toBe(23_800);
    expect((await sessions()).map((row) => row.state).sort()).toEqual(['paid', 'surplus']);
    const refunds = (await world.stripe.refunds.list()).data;
    expect(refunds.map((refund) => [refund.amount, refund.status])).toEqual([[23_800, 'succeeded']]);
    expect(await accountBalance(world.db, `unallocated:${order.orderId}`)).toBe(0);
  });
});

describe('20 session expires while paying', () => {
  test('the milestone can be funded anew, and the buyer is told', async () => {
    await openPage();
    const [row] = await sessions();
    await world.control('POST', `sessions/${row?.sessionId ?? ''}/expire`, {});
    await world.settle();
    const after = await milestoneRow(world.db, drawing);
    expect([after.money, after.attention]).toEqual(['unfunded', 'payment-expired']);
    expect(world.mails.some((mail) => mail.subject.includes('payment of drawing failed'))).toBe(true);
    await openPage();
    await world.pay(drawing);
    await world.settle();
    const paid = await milestoneRow(world.db, drawing);
    expect([paid.money, paid.attention]).toEqual(['held', null]);
  });

  test('a payment that was made all the same is held', async () => {
    await openPage();
    const [row] = await sessions();
    await world.db
      .update(paymentSession)
      .set({ state: 'lapsed' })
      .where(eq(paymentSession.milestoneId, drawing));
    await world.db.update(milestone).set({ money: 'unfunded' }).where(eq(milestone.id, drawing));
    await payAt(row?.sessionId ?? null);
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('held');
  });
});

test('21 buyer never returns', async () => {
  const { url } = await openPage();
  // Paid on the hosted page itself; the browser is closed before it comes back.
  const shown = await fetch(url);
  expect(shown.status).toBe(200);
  await world.pay(drawing);
  await world.settle();
  expect((await milestoneRow(world.db, drawing)).money).toBe('held');
  expect((await milestoneRow(world.db, drawing)).work).toBe('open');
});

describe('22 completed but unpaid', () => {
  test('is not held before the bank has confirmed it, and takes no second payment meanwhile', async () => {
    await openPage();
    await world.pay(drawing, 'AT321904300235473204');
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('paying');
    expect((await sessions()).map((row) => row.state)).toEqual(['processing']);
    const refused = await refusal(openPage());
    expect(refused.code).toBe('state-conflict');
    await world.control('POST', 'clock', { advanceSeconds: 200 });
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('held');
    expect(await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'fund'))).toHaveLength(1);
  });

  test('a debit that the bank refuses later can be paid anew', async () => {
    await openPage();
    await world.pay(drawing, 'AT861904300235473202');
    await world.settle();
    await world.control('POST', 'clock', { advanceSeconds: 10 });
    await world.settle();
    const row = await milestoneRow(world.db, drawing);
    expect([row.money, row.attention]).toEqual(['unfunded', 'payment-failed']);
    expect(await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'fund'))).toEqual([]);
    await openPage();
    await world.pay(drawing);
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('held');
  });

  test('a declined card leaves the page open and tells the buyer', async () => {
    await openPage();
    await world.pay(drawing, '4000000000009995');
    await world.settle();
    const row = await milestoneRow(world.db, drawing);
    expect([row.money, row.attention]).toEqual(['paying', 'payment-failed']);
    expect(world.mails.some((mail) => mail.subject.includes('payment of drawing failed'))).toBe(true);
    await world.pay(drawing);
    await world.settle();
    expect((await milestoneRow(world.db, drawing)).money).toBe('held');
  });
});

test('outsiders, lesser roles and the other side cannot open a payment page, and nothing changes', async () => {
  const attempts = [
    [cast.outsider, 'not-found'],
    [cast.otherShop, 'not-found'],
    [cast.engineer, 'not-allowed'],
    [cast.technician, 'not-allowed'],
    [cast.shopOwner, 'not-allowed'],
    [cast.admin, 'not-found'],
  ] as const;
  for (const [actor, code] of attempts) expect(await refusalCode(openPage(actor))).toBe(code);
  expect(await sessions()).toEqual([]);
  expect((await milestoneRow(world.db, drawing)).money).toBe('unfunded');
});
