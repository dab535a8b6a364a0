import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Payments } from '../../../src/lib/server/adapters/payments.ts';
import { job } from '../../../src/lib/server/db/schema/platform.ts';
import {
  ledgerTx,
  moneyAlarm,
  paymentOperation,
  paymentSession,
} from '../../../src/lib/server/db/schema/money.ts';
import {
  executeOperation,
  fundMilestone,
  latestOperation,
  recoverOperations,
  releaseMilestone,
  releasePurpose,
} from '../../../src/lib/server/money/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast, type TestOrder } from '../../support/orders.ts';
import { refusalCode } from '../../support/refusal.ts';

// The situations of calls to the payment service; what they must never do is lose, double or leave stuck.

let world: MoneyWorld;
let cast: Cast;
let order: TestOrder;
let drawing: string;
const later = Number.MAX_SAFE_INTEGER;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
  order = await anOrder(world.db, cast);
  drawing = order.milestone.drawing;
  await bringTo(world, cast, order, 'drawing-approved');
});
afterEach(() => world.close());

const release = () => releaseMilestone(world.db, cast.purchaser, { milestoneId: drawing });
const operation = async () => {
  const op = await latestOperation(world.db, releasePurpose(drawing));
  if (!op) throw new Error('no operation');
  return op;
};
const transfers = async () => (await world.stripe.transfers.list({ transfer_group: order.orderId })).data;
const bookings = async () =>
  (await world.db.select().from(ledgerTx).where(eq(ledgerTx.kind, 'release'))).length;
const fault = (kind: string, times = 1) =>
  world.control('POST', 'faults', { kind, times, method: 'POST', path: '/v1/transfers' });
/** The end that every situation has to come to. */
async function expectReleasedOnce() {
  const row = await milestoneRow(world.db, drawing);
  expect(row.money).toBe('released');
  expect(await transfers()).toHaveLength(1);
  expect(await bookings()).toBe(1);
  expect((await transfers())[0]?.amount).toBe(23_800 - 950);
}

test('1 crash after intent, before the call', async () => {
  await release();
  // The process dies: the job that should make the call is gone, only the committed row is left.
  await world.db.delete(job).where(eq(job.kind, 'payment-operation'));
  expect((await operation()).state).toBe('planned');
  expect(await transfers()).toHaveLength(0);
  await recoverOperations(world.db);
  await expectReleasedOnce();
});

test('2 crash after the call, before commit', async () => {
  await release();
  const dying: Payments = {
    ...world.payments,
    createTransfer: async (input) => {
      await world.payments.createTransfer(input);
      throw new Error('the process died here');
    },
  };
  const { id } = await operation();
  await expect(executeOperation(world.db, id, { payments: dying })).rejects.toThrow('the process died here');
  expect((await operation()).state).toBe('sent');
  expect(await bookings()).toBe(0);
  // While the lease runs nobody else tries; after it, the effect is found and booked.
  expect((await recoverOperations(world.db)).finished).toBe(0);
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
});

test.each(['cut-after-effect', 'cut-body', 'cut-before-effect'])(
  '3 timeout or severed body: state unknown, same key again (%s)',
  async (kind) => {
    // The SDK itself asks once more after a reset connection.
    await fault(kind, kind === 'cut-body' ? 1 : 2);
    await release();
    const { id, key } = await operation();
    expect(await executeOperation(world.db, id)).toBe('waiting');
    expect((await operation()).state).toBe('unknown');
    expect((await milestoneRow(world.db, drawing)).money).toBe('releasing');
    await recoverOperations(world.db, { now: later });
    expect((await operation()).key).toBe(key);
    await expectReleasedOnce();
  },
);

test('3 timeout or severed body: no answer at all within the time limit', async () => {
  await fault('hang-after-effect');
  await release();
  const { id } = await operation();
  const impatient = world.paymentsWith({ timeoutMs: 300 });
  expect(await executeOperation(world.db, id, { payments: impatient })).toBe('waiting');
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
});

test('4 retry after the key was pruned: look up by metadata first', async () => {
  await fault('cut-after-effect', 2);
  await release();
  const { id } = await operation();
  expect(await executeOperation(world.db, id)).toBe('waiting');
  await world.control('POST', 'keys/prune', {});
  await world.control('DELETE', 'requests');
  await recoverOperations(world.db, { now: later });
  const { data } = await world.control<{ data: { method: string; path: string }[] }>('GET', 'requests');
  expect(data.filter((r) => r.method === 'POST' && r.path === '/v1/transfers')).toEqual([]);
  await expectReleasedOnce();
});

test('5 same key, other parameters', async () => {
  const [account] = (await world.stripe.v2.core.accounts.list()).data;
  await world.stripe.transfers.create(
    { amount: 1, currency: 'eur', destination: account?.id ?? '', metadata: { purpose: 'something-else' } },
    { idempotencyKey: `coilyard:${releasePurpose(drawing)}:1` },
  );
  await release();
  const { id } = await operation();
  expect(await executeOperation(world.db, id)).toBe('failed');
  const renewed = await operation();
  expect([renewed.generation, renewed.state]).toEqual([2, 'planned']);
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
  expect((await world.db.select().from(moneyAlarm)).map((row) => row.kind)).toContain('key-reused');
});

test('6 two requests with one key at once', async () => {
  await release();
  const { id } = await operation();
  await world.control('POST', 'faults', {
    kind: 'delay',
    method: 'POST',
    path: '/v1/transfers',
    delayMs: 700,
  });
  const other = world.test.openAnother();
  const first = executeOperation(world.db, id);
  for (let tries = 0; (await operation()).state !== 'sent' && tries < 200; tries += 1) {
    await new Promise((resolve) => setTimeout(resolve, 5));
  }
  // A second process whose lease check is out of order asks with the very same key.
  const second = executeOperation(other, id, { now: later });
  expect(await second).toBe('waiting');
  expect(await first).toBe('known');
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
});

test('7 a 500 replayed for ever', async () => {
  await fault('error-500');
  await release();
  const { id } = await operation();
  expect(await executeOperation(world.db, id)).toBe('waiting');
  // The stored 500 comes again for this key; nothing is found, so a new key is taken.
  expect(await executeOperation(world.db, id, { now: later })).toBe('failed');
  expect((await operation()).generation).toBe(2);
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
});

test('7 a 500 replayed for ever, although the effect is there', async () => {
  await fault('error-500-after-effect');
  await release();
  const { id } = await operation();
  expect(await executeOperation(world.db, id)).toBe('waiting');
  await recoverOperations(world.db, { now: later });
  expect((await operation()).generation).toBe(1);
  await expectReleasedOnce();
});

test.each(['rate-limit-429', 'lock-timeout-429', 'conflict-409', 'unavailable-503'])(
  '8 429 and lock timeouts (%s)',
  async (kind) => {
    await fault(kind, 2);
    await release();
    const { id } = await operation();
    expect(await executeOperation(world.db, id)).toBe('waiting');
    for (let round = 0; round < 4; round += 1) await recoverOperations(world.db, { now: later });
    await expectReleasedOnce();
  },
);

test('9 service down for an hour', async () => {
  await world.control('POST', 'outage', { on: true });
  await release();
  const { build } = order.milestone;
  expect(await refusalCode(fundMilestone(world.db, cast.purchaser, { milestoneId: build }))).toBe(
    'payment-service',
  );
  for (let round = 0; round < 9; round += 1) await recoverOperations(world.db, { now: later });
  expect((await milestoneRow(world.db, drawing)).money).toBe('releasing');
  expect((await milestoneRow(world.db, build)).money).toBe('paying');
  expect((await world.db.select().from(moneyAlarm)).map((row) => row.kind)).toContain('operation-stuck');
  await world.control('POST', 'outage', { on: false });
  await recoverOperations(world.db, { now: later });
  await expectReleasedOnce();
  // The payment page that was asked for during the outage is there now, once.
  const { url } = await fundMilestone(world.db, cast.purchaser, { milestoneId: build });
  const rows = await world.db.select().from(paymentSession).where(eq(paymentSession.milestoneId, build));
  expect(rows.map((row) => [row.state, row.url])).toEqual([['open', url]]);
  expect((await world.stripe.checkout.sessions.list({ status: 'open' })).data).toHaveLength(1);
  const open = await world.db.select().from(paymentOperation).where(eq(paymentOperation.state, 'unknown'));
  expect(open).toEqual([]);
});
