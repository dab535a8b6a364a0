import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { dayMs } from '../../../src/lib/domain/dates.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { asBuiltRecord, drawingRevision, piece } from '../../../src/lib/server/db/schema/orders.ts';
import { request } from '../../../src/lib/server/db/schema/requests.ts';
import { fundMilestone, heldBalance, releaseMilestone } from '../../../src/lib/server/money/index.ts';
import {
  acknowledgeOrder,
  askRemake,
  concedeMiss,
  confirmReceipt,
  enterDeliveryProof,
  enterRecord,
  judgeDrawing,
  orderFor,
  piecesOf,
  returnSubmission,
  shipOrder,
  submitDrawing,
  submitMilestone,
} from '../../../src/lib/server/orders/index.ts';
import { declineOrder, endByRight, suspendOrder } from '../../../src/lib/server/workflows/end-order.ts';
import { answerEnd, proposeEnd } from '../../../src/lib/server/workflows/end-proposals.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import {
  aCast,
  aCleanFile,
  anOrder,
  aRecordBody,
  bringTo,
  fund,
  readyPayout,
  ship,
  submitBuild,
  type Cast,
  type TestOrder,
} from '../../support/orders.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let world: MoneyWorld;
let cast: Cast;
let order: TestOrder;

beforeEach(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
  order = await anOrder(world.db, cast);
});
afterEach(() => world.close());

const current = () => orderFor(world.db, cast.purchaser, 'order.view', order.orderId);

describe('acknowledging', () => {
  test('outsiders and lesser roles are refused and nothing changes', async () => {
    const input = { orderId: order.orderId };
    expect(await refusalCode(acknowledgeOrder(world.db, cast.otherShop, input))).toBe('not-found');
    expect(await refusalCode(acknowledgeOrder(world.db, cast.builder, input))).toBe('not-allowed');
    expect(await refusalCode(acknowledgeOrder(world.db, cast.purchaser, input))).toBe('not-allowed');
    expect((await current()).state).toBe('to-acknowledge');
  });

  test('not in time: both are told, and the buyer may end it; the request opens for another award', async () => {
    const early = endByRight(world.db, cast.purchaser, {
      orderId: order.orderId,
      ground: 'not-acknowledged',
    });
    expect(await refusalCode(early)).toBe('state-conflict');
    await world.advance(7 * dayMs);
    await world.settle();
    expect(world.mails.some((mail) => mail.subject.includes('not in time: acknowledge the order'))).toBe(
      true,
    );
    const foreign = endByRight(world.db, cast.outsider, {
      orderId: order.orderId,
      ground: 'not-acknowledged',
    });
    expect(await refusalCode(foreign)).toBe('not-found');
    await endByRight(world.db, cast.purchaser, { orderId: order.orderId, ground: 'not-acknowledged' });
    const ended = await current();
    expect(ended.state).toBe('ended');
    const [asked] = await world.db.select().from(request).where(eq(request.id, ended.requestId));
    expect(asked?.state).toBe('re-opened');
  });

  test('declined by the fabricator: ended, with the reason told', async () => {
    await declineOrder(world.db, cast.estimator, {
      orderId: order.orderId,
      reason: 'The mandrel is booked.',
    });
    expect((await current()).state).toBe('ended');
  });
});

describe('funding waits', () => {
  test('reminders, then the fabricator may suspend, funding resumes; at last either side may end', async () => {
    await bringTo(world, cast, order, 'acknowledged');
    expect(await refusalCode(suspendOrder(world.db, cast.estimator, { orderId: order.orderId }))).toBe(
      'state-conflict',
    );
    await world.advance(8 * dayMs + 1000);
    await world.settle();
    const reminders = world.mails.filter((mail) => mail.subject.includes('fund the drawing milestone by'));
    expect(reminders.length).toBeGreaterThan(0);
    await world.settle();
    expect(world.mails.filter((mail) => mail.subject.includes('fund the drawing milestone by'))).toHaveLength(
      reminders.length,
    );
    await world.advance(2 * dayMs);
    await world.settle();
    await suspendOrder(world.db, cast.estimator, { orderId: order.orderId });
    expect((await current()).state).toBe('suspended');
    await fund(world, cast, order.milestone.drawing);
    expect((await current()).state).toBe('running');
  });

  test('thirty days without funding: either side may end, nothing moves', async () => {
    await bringTo(world, cast, order, 'acknowledged');
    await fundMilestone(world.db, cast.purchaser, { milestoneId: order.milestone.drawing });
    await world.advance(31 * dayMs);
    await world.settle();
    await endByRight(world.db, cast.shopOwner, { orderId: order.orderId, ground: 'not-funded' });
    await world.settle();
    expect((await current()).state).toBe('ended');
    const row = await milestoneRow(world.db, order.milestone.drawing);
    expect([row.work, row.money]).toEqual(['cancelled', 'unfunded']);
  });
});

describe('drawings', () => {
  const submit = async (actor = cast.builder) =>
    submitDrawing(world.db, actor, {
      orderId: order.orderId,
      fileId: await aCleanFile(world.db, cast.builder, cast.fabricatorId, 'coil-drawing'),
      note: '',
      commandId: newId(),
    });

  test('cannot be submitted before the money of the drawing is held', async () => {
    await bringTo(world, cast, order, 'acknowledged');
    expect(await refusalCode(submit())).toBe('state-conflict');
  });

  test('revisions run A, B, C; changes need reasons; only the buyer judges; a later one replaces a waiting one', async () => {
    await bringTo(world, cast, order, 'drawing-held');
    expect(await refusalCode(submit(cast.engineer))).toBe('not-allowed');
    expect(await refusalCode(submit(cast.otherShop))).toBe('not-found');
    const a = await submit();
    const judge = { revisionId: a.revisionId, decision: 'request-changes' as const, reasons: '' };
    expect((await refusal(judgeDrawing(world.db, cast.engineer, judge))).fields).toHaveProperty('reasons');
    expect(await refusalCode(judgeDrawing(world.db, cast.builder, { ...judge, reasons: 'x' }))).toBe(
      'not-allowed',
    );
    expect(await refusalCode(judgeDrawing(world.db, cast.technician, { ...judge, reasons: 'x' }))).toBe(
      'not-allowed',
    );
    await judgeDrawing(world.db, cast.engineer, { ...judge, reasons: 'The leads are too short.' });
    const b = await submit();
    const c = await submit();
    expect([a.letter, b.letter, c.letter]).toEqual(['A', 'B', 'C']);
    const states = await world.db.select().from(drawingRevision);
    expect(states.map((row) => row.state)).toEqual(['changes-requested', 'superseded', 'submitted']);
    await judgeDrawing(world.db, cast.engineer, {
      revisionId: c.revisionId,
      decision: 'approve',
      reasons: '',
    });
    const row = await milestoneRow(world.db, order.milestone.drawing);
    expect([row.work, row.money]).toEqual(['accepted', 'held']);
    expect(row.windowEndsAt).not.toBeNull();
  });

  test('silence never approves; after twenty working days the fabricator may end with the drawing share released', async () => {
    await bringTo(world, cast, order, 'drawing-held');
    await submit();
    await world.advance(35 * dayMs);
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.drawing)).work).toBe('open');
    await endByRight(world.db, cast.shopOwner, { orderId: order.orderId, ground: 'drawing-unanswered' });
    await world.settle();
    const row = await milestoneRow(world.db, order.milestone.drawing);
    expect([row.work, row.money]).toEqual(['accepted', 'released']);
    expect((await current()).state).toBe('ended');
  });
});

describe('as-built records', () => {
  const enter = async (inductance: number, uncertainty = 0.01e-6, actor = cast.builder, pieceId?: string) => {
    const id = pieceId ?? (await piecesOf(world.db, order.orderId)).at(-1)?.id ?? '';
    return enterRecord(world.db, actor, {
      pieceId: id,
      body: aRecordBody(inductance, uncertainty),
      photos: [],
      certificates: [],
      commandId: newId(),
    });
  };

  test('are judged against the order specification with the uncertainty of the measurement', async () => {
    await bringTo(world, cast, order, 'build-held');
    expect(await refusalCode(enter(1.2e-6, 0.01e-6, cast.engineer))).toBe('not-allowed');
    expect((await enter(1.2e-6)).verdict).toBe('pass');
    expect((await enter(1.255e-6)).verdict).toBe('pass-with-remark');
    expect((await enter(1.265e-6)).verdict).toBe('pass-with-remark');
    expect((await enter(1.28e-6)).verdict).toBe('fail');
    expect((await world.db.select().from(asBuiltRecord)).map((row) => row.attempt)).toEqual([1, 2, 3, 4]);
  });

  test('a miss keeps the build from being submitted until it is accepted or made anew', async () => {
    await bringTo(world, cast, order, 'build-held');
    const { recordId } = await enter(1.3e-6);
    const submit = { milestoneId: order.milestone.build, note: '' };
    expect(await refusalCode(submitMilestone(world.db, cast.builder, submit))).toBe('state-conflict');
    expect(await refusalCode(concedeMiss(world.db, cast.builder, { recordId, reasons: 'ok' }))).toBe(
      'not-allowed',
    );
    const remake = { recordId, reasons: 'Out by 5 %.', dueDate: '2099-01-01' };
    const { pieceId } = await askRemake(world.db, cast.engineer, remake);
    const pieces = await world.db.select().from(piece);
    expect(pieces.map((row) => row.state).sort()).toEqual(['planned', 'replaced']);
    expect((await current()).dueDate).toBe('2099-01-01');
    const second = await enter(1.29e-6, 0.01e-6, cast.builder, pieceId);
    await concedeMiss(world.db, cast.engineer, { recordId: second.recordId, reasons: 'Fits our setting.' });
    await submitMilestone(world.db, cast.builder, submit);
    expect((await milestoneRow(world.db, order.milestone.build)).work).toBe('submitted');
  });

  test('a returned submission is counted, needs reasons, and its money stays held', async () => {
    await bringTo(world, cast, order, 'build-held');
    await submitBuild(world.db, cast, order);
    const input = { milestoneId: order.milestone.build, reasons: '' };
    expect((await refusal(returnSubmission(world.db, cast.engineer, input))).fields).toHaveProperty(
      'reasons',
    );
    const given = { ...input, reasons: 'No photo of the joints.' };
    expect(await refusalCode(returnSubmission(world.db, cast.builder, given))).toBe('not-allowed');
    await returnSubmission(world.db, cast.engineer, given);
    const row = await milestoneRow(world.db, order.milestone.build);
    expect([row.work, row.money, row.returnedCount, row.windowEndsAt]).toEqual(['open', 'held', 1, null]);
    await submitBuild(world.db, cast, order);
    expect((await milestoneRow(world.db, order.milestone.build)).work).toBe('submitted');
  });

  test('fourteen days overdue: the buyer may end and all that is held is refunded', async () => {
    await bringTo(world, cast, order, 'build-held');
    await world.advance(60 * dayMs);
    await world.settle();
    await endByRight(world.db, cast.purchaser, { orderId: order.orderId, ground: 'overdue' });
    await world.settle();
    const build = await milestoneRow(world.db, order.milestone.build);
    expect([build.work, build.money]).toEqual(['cancelled', 'refunded']);
    // The drawing was accepted and its window had ended long before: it had been released by then.
    expect((await milestoneRow(world.db, order.milestone.drawing)).money).toBe('released');
  });
});

describe('delivery', () => {
  test('shipping and receipt by the right roles; the window starts with the receipt', async () => {
    await bringTo(world, cast, order, 'delivery-held');
    const details = {
      orderId: order.orderId,
      carrier: 'Parcel line',
      trackingNumber: '1',
      shippedOn: '2026-12-01',
      note: '',
      paperFileId: null,
      commandId: newId(),
    };
    expect(await refusalCode(shipOrder(world.db, cast.engineer, details))).toBe('not-allowed');
    expect(await refusalCode(shipOrder(world.db, cast.otherShop, details))).toBe('not-found');
    const shipmentId = await ship(world.db, cast, order);
    expect(await refusalCode(confirmReceipt(world.db, cast.builder, { shipmentId, note: '' }))).toBe(
      'not-allowed',
    );
    await confirmReceipt(world.db, cast.technician, { shipmentId, note: 'Crate dented.' });
    const row = await milestoneRow(world.db, order.milestone.delivery);
    expect(row.work).toBe('submitted');
    expect(await refusalCode(confirmReceipt(world.db, cast.technician, { shipmentId, note: '' }))).toBe(
      'state-conflict',
    );
  });

  test('receipt not confirmed: three days after the proof of delivery the window starts by itself, then it releases', async () => {
    await bringTo(world, cast, order, 'shipped');
    const [row] = await world.db
      .select()
      .from((await import('../../../src/lib/server/db/schema/orders.ts')).shipment);
    await enterDeliveryProof(world.db, cast.builder, {
      shipmentId: row?.id ?? '',
      deliveredOn: row?.shippedOn ?? '',
      proofFileId: null,
    });
    await world.advance(3 * dayMs + 1000);
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).work).toBe('submitted');
    await world.advance(12 * dayMs);
    await world.settle();
    expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('released');
    expect((await current()).state).toBe('done');
  });
});

describe('ending by agreement', () => {
  test('the other side accepts or counters; held money goes as agreed, unfunded milestones are cancelled', async () => {
    await bringTo(world, cast, order, 'build-held');
    const build = await heldBalance(world.db, order.milestone.build);
    const drawing = await heldBalance(world.db, order.milestone.drawing);
    const propose = (release: number, refund: number) => ({
      orderId: order.orderId,
      parts: [
        { milestoneId: order.milestone.drawing, release: drawing, refund: 0 },
        { milestoneId: order.milestone.build, release, refund },
      ],
      workInHand: 'The bent tube goes to the buyer.',
      reason: 'The part was dropped from production.',
      commandId: newId(),
    });
    expect(await refusalCode(proposeEnd(world.db, cast.engineer, propose(0, build)))).toBe('not-allowed');
    expect(await refusalCode(proposeEnd(world.db, cast.outsider, propose(0, build)))).toBe('not-found');
    const wrong = await refusal(proposeEnd(world.db, cast.purchaser, propose(1, build)));
    expect(wrong.fields).toHaveProperty(`release-${order.milestone.build}`);
    const first = await proposeEnd(world.db, cast.purchaser, propose(0, build));
    const second = await proposeEnd(world.db, cast.shopOwner, propose(30_000, build - 30_000));
    const stale = answerEnd(world.db, cast.shopOwner, { proposalId: first.proposalId, answer: 'accept' });
    expect(await refusalCode(stale)).toBe('state-conflict');
    const own = answerEnd(world.db, cast.shopOwner, { proposalId: second.proposalId, answer: 'accept' });
    expect(await refusalCode(own)).toBe('not-allowed');
    await answerEnd(world.db, cast.purchaser, { proposalId: second.proposalId, answer: 'accept' });
    await world.settle();
    expect((await current()).state).toBe('ended');
    const rows = await Promise.all(
      (['drawing', 'build', 'delivery'] as const).map((kind) =>
        milestoneRow(world.db, order.milestone[kind]),
      ),
    );
    expect(rows.map((row) => row.money)).toEqual(['released', 'split', 'unfunded']);
    expect(rows[2]?.work).toBe('cancelled');
  });
});

test('release: outsiders and lesser roles are refused and nothing changes', async () => {
  await bringTo(world, cast, order, 'received');
  const input = { milestoneId: order.milestone.delivery };
  expect(await refusalCode(releaseMilestone(world.db, cast.outsider, input))).toBe('not-found');
  expect(await refusalCode(releaseMilestone(world.db, cast.engineer, input))).toBe('not-allowed');
  expect(await refusalCode(releaseMilestone(world.db, cast.shopOwner, input))).toBe('not-allowed');
  expect(await refusalCode(releaseMilestone(world.db, cast.admin, input))).toBe('not-found');
  expect(await refusalCode(fundMilestone(world.db, cast.engineer, input))).toBe('not-allowed');
  expect((await milestoneRow(world.db, order.milestone.delivery)).money).toBe('held');
});
