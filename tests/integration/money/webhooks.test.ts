import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { Payments } from '../../../src/lib/server/adapters/payments.ts';
import {
  ledgerTx,
  moneyAlarm,
  paymentEvent,
  paymentSession,
} from '../../../src/lib/server/db/schema/money.ts';
import {
  accountBalance,
  backfillEvents,
  executeOperation,
  fundMilestone,
  heldBalance,
  latestOperation,
  processPaymentEvent,
  receivePaymentEvent,
  recoverOperations,
  releaseMilestone,
  releasePurpose,
} from '../../../src/lib/server/money/index.ts';
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

const openPage = () => fundMilestone(world.db, cast.purchaser, { milestoneId: drawing });
const money = async () => (await milestoneRow(world.db, drawing)).money;
const fundings = async () => world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'fund'));

async function expectHeldOnce() {
  expect(await money()).toBe('held');
  expect(await fundings()).toHaveLength(1);
  expect(await heldBalance(world.db, drawing)).toBe(23_800);
}

test('10 duplicate webhook', async () => {
  await openPage();
  await world.control('POST', 'webhooks', { duplicate: 100 });
  await world.pay(drawing);
  await world.settle();
  await expectHeldOnce();
  const events = await world.db
    .select()
    .from(paymentEvent)
    .where(eq(paymentEvent.type, 'checkout.session.completed'));
  expect(events).toHaveLength(1);
  const got = world.webhooks.raw.filter((raw) => raw.body.includes('checkout.session.completed'));
  expect(got.length).toBeGreaterThan(1);
  await world.control('POST', 'webhooks/resend', { event: events[0]?.id });
  await world.settle();
  await expectHeldOnce();
});

test('11 two events for one change', async () => {
  await openPage();
  await world.pay(drawing);
  await world.settle();
  const [funding] = await world.db
    .select()
    .from(paymentSession)
    .where(eq(paymentSession.milestoneId, drawing));
  await world.control('POST', 'disputes', { charge: funding?.chargeId });
  await world.settle();
  const told = (await world.db.select().from(paymentEvent)).map((row) => row.type);
  expect(told).toContain('charge.dispute.created');
  expect(told).toContain('charge.dispute.funds_withdrawn');
  const taken = await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'charge-back'));
  expect(taken).toHaveLength(1);
  expect(await money()).toBe('charged-back');
});

test('12 out of order', async () => {
  await openPage();
  await world.control('POST', 'webhooks', { paused: true });
  await world.pay(drawing, 'AT321904300235473204');
  await world.control('POST', 'clock', { advanceSeconds: 300 });
  // The newest first: "succeeded" before "completed".
  const events = (await world.stripe.events.list({ limit: 100 })).data;
  const types = events.map((event) => event.type);
  expect(types.indexOf('checkout.session.async_payment_succeeded')).toBeLessThan(
    types.indexOf('checkout.session.completed'),
  );
  for (const event of events) {
    const body = JSON.stringify(event);
    await receivePaymentEvent(world.db, body, await sign(body), world.payments);
    await processPaymentEvent(world.db, event.id, world.payments);
  }
  await expectHeldOnce();
});

/** A header signed with the secret of the endpoint, as the service would now. */
async function sign(body: string, options: { secret?: string; timestamp?: number } = {}): Promise<string> {
  return world.stripe.webhooks.generateTestHeaderString({
    payload: body,
    secret: options.secret ?? world.webhookSecret,
    ...(options.timestamp === undefined ? {} : { timestamp: options.timestamp }),
  });
}

describe('13 webhook before our own response is stored', () => {
  test('of the payment page', async () => {
    await world.control('POST', 'faults', {
      kind: 'cut-after-effect',
      times: 2,
      method: 'POST',
      path: '/v1/checkout/sessions',
    });
    const impatient = openPage();
    expect(await refusalCode(impatient)).toBe('payment-service');
    const [session] = (await world.stripe.checkout.sessions.list()).data;
    await world.control('POST', `sessions/${session?.id ?? ''}/pay`, {});
    // Only webhooks and their jobs: the lost answer itself is not asked for again.
    await world.control('POST', 'webhooks/flush');
    await world.work();
    await expectHeldOnce();
  });

  test('of a transfer', async () => {
    await openPage();
    await world.pay(drawing);
    await world.settle();
    await approveDrawing(world.db, cast, order);
    await releaseMilestone(world.db, cast.purchaser, { milestoneId: drawing });
    await world.control('POST', 'faults', {
      kind: 'cut-after-effect',
      times: 2,
      method: 'POST',
      path: '/v1/transfers',
    });
    const op = await latestOperation(world.db, releasePurpose(drawing));
    expect(await executeOperation(world.db, op?.id ?? '')).toBe('waiting');
    await world.settle();
    expect(await money()).toBe('released');
    expect((await latestOperation(world.db, releasePurpose(drawing)))?.state).toBe('known');
    await recoverOperations(world.db, { now: Number.MAX_SAFE_INTEGER });
    expect((await world.stripe.transfers.list({ transfer_group: order.orderId })).data).toHaveLength(1);
  });
});

test('14 webhook never comes', async () => {
  await openPage();
  await world.control('POST', 'webhooks', { drop: 1000 });
  await world.pay(drawing);
  await world.settle();
  expect(await money()).toBe('paying');
  expect(await backfillEvents(world.db)).toBeGreaterThan(0);
  await world.work();
  await expectHeldOnce();
});

test('15 forged, replayed or stale signature', async () => {
  await openPage();
  await world.control('POST', 'webhooks', { paused: true });
  await world.pay(drawing);
  const [event] = (await world.stripe.events.list({ type: 'checkout.session.completed' })).data;
  const body = JSON.stringify(event);
  const take = (raw: string, header: string | null) =>
    receivePaymentEvent(world.db, raw, header, world.payments);
  const stored = async () =>
    (
      await world.db
        .select()
        .from(paymentEvent)
        .where(eq(paymentEvent.id, event?.id ?? ''))
    ).length;

  expect(await refusalCode(take(body, await sign(body, { secret: 'whsec_of_somebody_else' })))).toBe(
    'invalid-input',
  );
  expect(await refusalCode(take(body, null))).toBe('invalid-input');
  const old = Math.floor(Date.now() / 1000) - 301;
  expect(await refusalCode(take(body, await sign(body, { timestamp: old })))).toBe('invalid-input');
  const good = await sign(body);
  expect(await refusalCode(take(body.replace('23800', '1'), good))).toBe('invalid-input');
  expect(await stored()).toBe(0);
  await take(body, good);
  await take(body, good);
  expect(await stored()).toBe(1);
  await world.work();
  await expectHeldOnce();
});

test('16 crash in the webhook job after its effect', async () => {
  await openPage();
  await world.pay(drawing);
  await world.settle();
  await expectHeldOnce();
  const [event] = await world.db
    .select()
    .from(paymentEvent)
    .where(eq(paymentEvent.type, 'checkout.session.completed'));
  // The job had its effect, and died before it could say so.
  await world.db
    .update(paymentEvent)
    .set({ state: 'received' })
    .where(eq(paymentEvent.id, event?.id ?? ''));
  await processPaymentEvent(world.db, event?.id ?? '');
  await expectHeldOnce();
  const [again] = await world.db
    .select()
    .from(paymentEvent)
    .where(eq(paymentEvent.id, event?.id ?? ''));
  expect(again?.state).toBe('processed');
  expect(world.mails.filter((mail) => mail.subject.includes('drawing funded')).length).toBe(
    new Set(world.mails.filter((mail) => mail.subject.includes('drawing funded')).map((mail) => mail.to))
      .size,
  );
});

test('17 endpoint down for three days: backfill', async () => {
  await openPage();
  world.webhooks.up = false;
  await world.pay(drawing);
  await world.settle();
  await world.control('POST', 'clock', { advanceSeconds: 3 * 86_400 + 3600 });
  await world.settle();
  expect(await money()).toBe('paying');
  world.webhooks.up = true;
  await backfillEvents(world.db);
  await world.work();
  await expectHeldOnce();
});

describe('18 amount, currency or payee differs: quarantine', () => {
  test('of a payment: set apart, nothing is held, the milestone can be paid anew', async () => {
    await openPage();
    await world.db
      .update(paymentSession)
      .set({ amount: 23_801 })
      .where(eq(paymentSession.milestoneId, drawing));
    await world.pay(drawing);
    await world.settle();
    const row = await milestoneRow(world.db, drawing);
    expect([row.money, row.attention]).toEqual(['unfunded', 'amount-differs']);
    expect(await heldBalance(world.db, drawing)).toBe(0);
    expect(await accountBalance(world.db, `unallocated:${order.orderId}`)).toBe(23_800);
    expect((await world.db.select().from(moneyAlarm)).map((alarm) => alarm.kind)).toContain(
      'payment-differs',
    );
  });

  test('of a payout: nothing is booked, a person has to look', async () => {
    await fund(world, cast, drawing);
    await approveDrawing(world.db, cast, order);
    await releaseMilestone(world.db, cast.purchaser, { milestoneId: drawing });
    const astray: Payments = {
      ...world.payments,
      createTransfer: async (input) => ({
        ...(await world.payments.createTransfer(input)),
        destinationId: 'acct_of_somebody_else',
      }),
    };
    const op = await latestOperation(world.db, releasePurpose(drawing));
    expect(await executeOperation(world.db, op?.id ?? '', { payments: astray })).toBe('failed');
    expect(await money()).toBe('releasing');
    expect(await heldBalance(world.db, drawing)).toBe(23_800);
    expect((await world.db.select().from(moneyAlarm)).map((alarm) => alarm.kind)).toContain('answer-differs');
  });
});
