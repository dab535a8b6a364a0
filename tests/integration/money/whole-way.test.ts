import { afterEach, beforeEach, expect, test } from 'vitest';
import { orderFor } from '../../../src/lib/server/orders/index.ts';
import { accountBalance, booksOf, releaseMilestone } from '../../../src/lib/server/money/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast } from '../../support/orders.ts';

let world: MoneyWorld;
let cast: Cast;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
});
afterEach(() => world.close());

test('from award to released payment: every stage is paid, held, released, and the books are in balance', async () => {
  const accountId = await readyPayout(world, cast);
  const order = await anOrder(world.db, cast);
  await bringTo(world, cast, order, 'received');
  for (const kind of ['drawing', 'build', 'delivery'] as const) {
    await releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone[kind] });
  }
  await world.settle();
  for (const kind of ['drawing', 'build', 'delivery'] as const) {
    const row = await milestoneRow(world.db, order.milestone[kind]);
    expect([kind, row.work, row.money]).toEqual([kind, 'accepted', 'released']);
  }
  expect((await orderFor(world.db, cast.purchaser, 'order.view', order.orderId)).state).toBe('done');

  // 5 % of the net price without freight: 950.00 → 47.50, in whole over the three releases.
  expect(await accountBalance(world.db, 'platform-fee:EUR')).toBe(4_750);
  const books = await booksOf(world.db, Object.values(order.milestone));
  const sum = [...books.values()].reduce(
    (a, b) => ({ funded: a.funded + b.funded, released: a.released + b.released, held: a.held + b.held }),
    { funded: 0, released: 0, held: 0 },
  );
  expect(sum).toEqual({ funded: 119_000, released: 119_000 - 4_750, held: 0 });

  const transfers = await world.stripe.transfers.list({ destination: accountId });
  expect(transfers.data.reduce((a, t) => a + t.amount, 0)).toBe(119_000 - 4_750);
  const subjects = world.mails.map((mail) => mail.subject.replace(/^O-\d+: /, ''));
  for (const subject of [
    'order acknowledged',
    'drawing funded',
    'drawing revision A to judge',
    'drawing revision A approved',
    'build submitted',
    'shipped',
    'received',
    'delivery released and paid out',
    'order done',
  ]) {
    expect(subjects).toContain(subject);
  }
});
