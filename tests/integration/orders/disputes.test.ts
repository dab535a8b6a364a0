import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { dayMs } from '../../../src/lib/domain/dates.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { dispute } from '../../../src/lib/server/db/schema/disputes.ts';
import {
  addStatement,
  answerOffer,
  appealDispute,
  decideAppeal,
  decideDispute,
  offerSettlement,
  openDispute,
  withdrawDispute,
} from '../../../src/lib/server/disputes/index.ts';
import { accountBalance, heldBalance, releaseMilestone } from '../../../src/lib/server/money/index.ts';
import { orderFor } from '../../../src/lib/server/orders/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import { aCast, anOrder, bringTo, readyPayout, type Cast, type TestOrder } from '../../support/orders.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;
let order: TestOrder;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
  order = await anOrder(world.db, cast);
  await bringTo(world, cast, order, 'received');
});
afterEach(() => world.close());

const opening = (milestoneId: string, amountClaimed = 10_000) => ({
  milestoneId,
  reason: 'not-as-specified' as const,
  complaintAbout: 'Inductance, bare',
  pieceId: null,
  amountClaimed,
  text: 'Measured 1.31 µH on our bridge.',
  fileIds: [],
  commandId: newId(),
});

const decision = (disputeId: string, release: number, refund: number) => ({
  disputeId,
  release,
  refund,
  goods: 'The coil stays with the buyer.',
  otherMilestones: '',
  freightPaidBy: 'none' as const,
  reason: 'The incoming measurement lies outside the limit by more than both uncertainties.',
});

const open = async () =>
  (await openDispute(world.db, cast.purchaser, opening(order.milestone.delivery))).disputeId;
const stateOf = async (id: string) =>
  (await world.db.select().from(dispute).where(eq(dispute.id, id)))[0]?.state;

describe('opening', () => {
  test('outsiders and lesser roles are refused and nothing changes', async () => {
    const input = opening(order.milestone.delivery);
    expect(await refusalCode(openDispute(world.db, cast.outsider, input))).toBe('not-found');
    expect(await refusalCode(openDispute(world.db, cast.otherShop, input))).toBe('not-found');
    expect(await refusalCode(openDispute(world.db, cast.technician, input))).toBe('not-allowed');
    expect(await refusalCode(openDispute(world.db, cast.builder, input))).toBe('not-allowed');
    expect(await refusalCode(openDispute(world.db, null, input))).toBe('sign-in-needed');
    expect(await world.db.select().from(dispute)).toEqual([]);
  });

  test('stops the release of the milestone and the clocks of the order, and takes one dispute per milestone', async () => {
    await open();
    expect(
      (await orderFor(world.db, cast.purchaser, 'order.view', order.orderId)).clockStoppedAt,
    ).not.toBeNull();
    const refused = await refusal(
      releaseMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.delivery }),
    );
    expect(refused.code).toBe('state-conflict');
    expect(await refusalCode(openDispute(world.db, cast.shopOwner, opening(order.milestone.delivery)))).toBe(
      'already-exists',
    );
    await world.advance(60 * dayMs);
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('held');
    // The other milestones are not released by the end of their window either.
    expect((await milestoneRow(world.db, order.milestone.build)).money).toBe('held');
  });

  test('claims more than is held are refused at the field', async () => {
    const refused = await refusal(
      openDispute(world.db, cast.purchaser, opening(order.milestone.delivery, 999_999)),
    );
    expect(Object.keys(refused.fields)).toEqual(['amountClaimed']);
  });
});

describe('settling', () => {
  test('an offer accepted by the other side moves the money at once, without the platform', async () => {
    const disputeId = await open();
    const held = await heldBalance(world.db, order.milestone.delivery);
    const { offerId } = await offerSettlement(world.db, cast.purchaser, {
      disputeId,
      release: held - 5_000,
      refund: 5_000,
      note: 'For the rework.',
      commandId: newId(),
    });
    expect(await refusalCode(answerOffer(world.db, cast.purchaser, { offerId, answer: 'accept' }))).toBe(
      'not-allowed',
    );
    expect(await refusalCode(answerOffer(world.db, cast.builder, { offerId, answer: 'accept' }))).toBe(
      'not-allowed',
    );
    await answerOffer(world.db, cast.shopOwner, { offerId, answer: 'accept' });
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.delivery);
    expect([row.money, row.work, row.refundAmount]).toEqual(['split', 'accepted', 5_000]);
    expect(await stateOf(disputeId)).toBe('settled');
    expect(await heldBalance(world.db, order.milestone.delivery)).toBe(0);
  });

  test('offers that do not add up to what is held are refused', async () => {
    const disputeId = await open();
    const refused = await refusal(
      offerSettlement(world.db, cast.purchaser, {
        disputeId,
        release: 1,
        refund: 1,
        note: '',
        commandId: newId(),
      }),
    );
    expect(refused.code).toBe('invalid-input');
  });
});

describe('deciding', () => {
  test('the money moves only when the days of appeal are over', async () => {
    const disputeId = await open();
    const held = await heldBalance(world.db, order.milestone.delivery);
    const early = await refusal(decideDispute(world.db, cast.admin, decision(disputeId, held, 0)));
    expect(early.code).toBe('state-conflict');
    await addStatement(world.db, cast.shopOwner, {
      disputeId,
      text: 'Our bridge says 1.25 µH.',
      fileIds: [],
      commandId: newId(),
    });
    expect(await stateOf(disputeId)).toBe('answered');
    expect(await refusalCode(decideDispute(world.db, cast.purchaser, decision(disputeId, held, 0)))).toBe(
      'not-found',
    );
    await decideDispute(world.db, cast.admin, decision(disputeId, 20_000, held - 20_000));
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('held');
    await world.advance(5 * dayMs + 1000);
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.delivery);
    expect([row.money, row.releaseAmount, row.refundAmount]).toEqual(['split', 20_000, held - 20_000]);
    expect(await stateOf(disputeId)).toBe('final');
    expect(await accountBalance(world.db, `held:${row.id}`)).toBe(0);
  });

  test('an appeal is decided by another admin, and the money moves then', async () => {
    const disputeId = await open();
    const held = await heldBalance(world.db, order.milestone.delivery);
    await addStatement(world.db, cast.shopOwner, { disputeId, text: 'No.', fileIds: [], commandId: newId() });
    await decideDispute(world.db, cast.admin, decision(disputeId, 0, held));
    await appealDispute(world.db, cast.shopOwner, {
      disputeId,
      text: 'The bridge was not compensated.',
      commandId: newId(),
    });
    await world.advance(30 * dayMs);
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('held');
    expect(await refusalCode(decideAppeal(world.db, cast.admin, decision(disputeId, held, 0)))).toBe(
      'not-allowed',
    );
    await decideAppeal(world.db, cast.admin2, decision(disputeId, held, 0));
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('released');
  });

  test('without an answer in time the platform may decide', async () => {
    const disputeId = await open();
    const held = await heldBalance(world.db, order.milestone.delivery);
    await world.advance(7 * dayMs + 1000);
    await world.settle();
    await decideDispute(world.db, cast.admin, decision(disputeId, 0, held));
    expect(await stateOf(disputeId)).toBe('decided');
    await world.advance(5 * dayMs + 1000);
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.delivery);
    expect([row.money, row.work]).toEqual(['refunded', 'cancelled']);
  });
});

test('a withdrawn dispute lets the clocks run again, the window moved by the time they stood still', async () => {
  const before = await milestoneRow(world.db, order.milestone.delivery);
  const disputeId = await open();
  await world.advance(4 * dayMs);
  await withdrawDispute(world.db, cast.purchaser, { disputeId });
  const after = await milestoneRow(world.db, order.milestone.delivery);
  // Four days and some moments: every day begun counts, so that the window is never shorter than before.
  expect(Math.round(((after.windowEndsAt ?? 0) - (before.windowEndsAt ?? 0)) / dayMs)).toBe(5);
  await world.advance(16 * dayMs);
  await world.settle();
  expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('released');
});
