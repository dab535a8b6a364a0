import { and, eq } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Actor } from '../../src/lib/domain/actor.ts';
import { addDays, dateIn, dayMs } from '../../src/lib/domain/dates.ts';
import { moveClock } from '../../src/lib/server/adapters/clock.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import {
  askBidAgain,
  confirmBid,
  decideException,
  lapseBids,
  ownBid,
  requestForBidder,
  reviseBid,
  saveBid,
  submitBid,
  withdrawBid,
} from '../../src/lib/server/bids/index.ts';
import { approval, bid, bidException } from '../../src/lib/server/db/schema/bids.ts';
import { coilOrder, milestone, orderSpecification } from '../../src/lib/server/db/schema/orders.ts';
import { outboxMail } from '../../src/lib/server/db/schema/platform.ts';
import { request } from '../../src/lib/server/db/schema/requests.ts';
import { compareBids } from '../../src/lib/server/workflows/compare-bids.ts';
import { awardBid, decideApproval } from '../../src/lib/server/workflows/award-bid.ts';
import { declineOrder } from '../../src/lib/server/workflows/end-order.ts';
import { testDatabase, type TestDatabase } from '../support/db.ts';
import { aCompany, aMember } from '../support/people.ts';
import { aPostedRequest, aReadyPayout, bidValues } from '../support/requests.ts';

let test: TestDatabase;
let buyerId: string;
let engineer: Actor;
let purchaser: Actor;
let shopId: string;
let estimator: Actor;
let builder: Actor;
let otherId: string;
let otherEstimator: Actor;
let requestId: string;
const validUntil = addDays(dateIn('Europe/Berlin', Date.now()), 60);

beforeEach(async () => {
  test = await testDatabase();
  const { db } = test;
  buyerId = await aCompany(db, 'buyer');
  engineer = await aMember(db, buyerId, ['engineer']);
  purchaser = await aMember(db, buyerId, ['purchaser']);
  shopId = await aCompany(db, 'fabricator', { verified: true });
  estimator = await aMember(db, shopId, ['estimator']);
  builder = await aMember(db, shopId, ['builder']);
  otherId = await aCompany(db, 'fabricator', { verified: true });
  otherEstimator = await aMember(db, otherId, ['estimator']);
  await aReadyPayout(db, shopId);
  await aReadyPayout(db, otherId);
  ({ requestId } = await aPostedRequest(db, engineer, buyerId));
});
afterEach(() => test.close());

function handIn(actor: Actor, companyId: string, options: Parameters<typeof bidValues>[1] = {}) {
  return submitBid(test.db, actor, {
    requestId,
    companyId,
    commandId: newId(),
    version: null,
    values: bidValues(validUntil, options),
  });
}

async function mailsOf(kind: string): Promise<string[]> {
  const rows = await test.db.select().from(outboxMail).where(eq(outboxMail.kind, kind));
  return rows.map((row) => row.toEmail).sort();
}

describe('a bid', () => {
  it('is handed in with its sums and told to those who compare', async () => {
    const saved = await handIn(estimator, shopId);
    expect(saved).toMatchObject({
      state: 'submitted',
      netAmount: 193_500,
      freightAmount: 9_500,
      taxAmount: 36_765,
      totalAmount: 230_265,
    });
    expect(await mailsOf('bid-received')).toEqual([engineer.email, purchaser.email].sort());
  });

  it('is made once when the same form is sent twice', async () => {
    const input = {
      requestId,
      companyId: shopId,
      commandId: newId(),
      version: null,
      values: bidValues(validUntil),
    };
    const first = await saveBid(test.db, estimator, input);
    const second = await saveBid(test.db, estimator, input);
    expect(second.id).toBe(first.id);
    expect(await test.db.select().from(bid)).toHaveLength(1);
  });

  it('says beside the field what a submitted bid still needs', async () => {
    const values = bidValues('2020-01-01', { leadTimeWorkingDays: 0 });
    values.body.lines = [];
    values.body.milestonePlan = [
      { kind: 'drawing', shareBp: 5000 },
      { kind: 'build', shareBp: 4000 },
      { kind: 'delivery', shareBp: 1000 },
    ];
    await expect(
      submitBid(test.db, estimator, {
        requestId,
        companyId: shopId,
        commandId: newId(),
        version: null,
        values,
      }),
    ).rejects.toMatchObject({
      code: 'invalid-input',
      fields: {
        'price.coil': expect.any(String) as string,
        'share.drawing': expect.stringContaining('20 %') as string,
        'share.delivery': expect.stringContaining('20 %') as string,
        leadTime: expect.any(String) as string,
        validUntil: expect.any(String) as string,
      },
    });
    expect(await test.db.select().from(bid)).toHaveLength(0);
  });

  it('is refused to a role that does not bid, to an unverified shop and to the buyer, and nothing is written', async () => {
    const unverifiedId = await aCompany(test.db, 'fabricator');
    const unverified = await aMember(test.db, unverifiedId, ['owner']);
    await expect(handIn(builder, shopId)).rejects.toMatchObject({ code: 'not-allowed' });
    await expect(handIn(unverified, unverifiedId)).rejects.toMatchObject({ code: 'company-not-verified' });
    await expect(handIn(estimator, otherId)).rejects.toMatchObject({ code: 'not-found' });
    await expect(handIn(engineer, buyerId)).rejects.toMatchObject({ code: 'not-allowed' });
    expect(await test.db.select().from(bid)).toHaveLength(0);
  });

  it('is not taken after closing', async () => {
    await moveClock(test.db, 15 * dayMs);
    await expect(handIn(estimator, shopId)).rejects.toMatchObject({ code: 'state-conflict' });
  });

  it('is sealed: another bidder sees only their own, and nobody outside sees the comparison', async () => {
    await handIn(estimator, shopId);
    expect(await ownBid(test.db, otherEstimator, requestId, otherId)).toBeNull();
    await expect(ownBid(test.db, otherEstimator, requestId, shopId)).rejects.toMatchObject({
      code: 'not-found',
    });
    await expect(compareBids(test.db, otherEstimator, requestId)).rejects.toMatchObject({
      code: 'not-found',
    });
    const seen = JSON.stringify(await requestForBidder(test.db, otherEstimator, requestId, otherId));
    expect(seen).not.toContain('500000');
    expect(seen).not.toContain('budget');
  });

  it('can be revised and handed in again while the request is open; a stale form is refused', async () => {
    const first = await handIn(estimator, shopId);
    const draft = await reviseBid(test.db, estimator, { bidId: first.id, version: first.version });
    expect(draft.state).toBe('draft');
    await expect(
      saveBid(test.db, estimator, {
        requestId,
        companyId: shopId,
        commandId: newId(),
        version: first.version,
        values: bidValues(validUntil),
      }),
    ).rejects.toMatchObject({ code: 'version-conflict' });
    const again = await submitBid(test.db, estimator, {
      requestId,
      companyId: shopId,
      commandId: newId(),
      version: draft.version,
      values: bidValues(validUntil, { leadTimeWorkingDays: 12 }),
    });
    expect(again).toMatchObject({ state: 'submitted', leadTimeWorkingDays: 12 });
  });

  it('lapses when its validity ends, and a draft lapses when the request closes', async () => {
    await handIn(estimator, shopId);
    await saveBid(test.db, otherEstimator, {
      requestId,
      companyId: otherId,
      commandId: newId(),
      version: null,
      values: bidValues(validUntil),
    });
    expect(await lapseBids(test.db)).toBe(0);
    await test.db.update(request).set({ state: 'closed' }).where(eq(request.id, requestId));
    expect(await lapseBids(test.db)).toBe(1);
    await moveClock(test.db, 62 * dayMs);
    expect(await lapseBids(test.db)).toBe(1);
    expect((await test.db.select().from(bid)).map((row) => row.state)).toEqual(['lapsed', 'lapsed']);
  });
});

describe('exceptions', () => {
  const exception = { subject: 'Tube section or wall', text: '8 × 1 mm instead of 8 × 0.9 mm' };

  it('are decided before the award; a refusal goes back to the bidder for confirmation', async () => {
    const saved = await handIn(estimator, shopId, { exceptions: [exception] });
    await expect(awardBid(test.db, purchaser, { bidId: saved.id, version: saved.version })).rejects.toThrow(
      /exception is undecided/,
    );
    const [row] = await test.db.select().from(bidException);
    await expect(
      decideException(test.db, engineer, { exceptionId: row?.id ?? '', decision: 'refuse', reason: ' ' }),
    ).rejects.toMatchObject({ fields: { reason: expect.any(String) as string } });
    await decideException(test.db, engineer, {
      exceptionId: row?.id ?? '',
      decision: 'refuse',
      reason: 'The wall must stay below 0.9 mm.',
    });
    expect(await mailsOf('bid-to-confirm')).toContain(estimator.email);
    const back = await ownBid(test.db, estimator, requestId, shopId);
    expect(back?.state).toBe('to-confirm');
    await expect(
      awardBid(test.db, purchaser, { bidId: saved.id, version: back?.version ?? 0 }),
    ).rejects.toMatchObject({ code: 'state-conflict' });
    const confirmed = await confirmBid(test.db, estimator, { bidId: saved.id, version: back?.version ?? 0 });
    expect(confirmed.state).toBe('submitted');
    const outcome = await awardBid(test.db, purchaser, { bidId: saved.id, version: confirmed.version });
    expect(outcome.kind).toBe('awarded');
    const [spec] = await test.db.select().from(orderSpecification);
    expect(JSON.parse(spec?.body ?? '{}')).toMatchObject({
      acceptedExceptions: [],
      refusedExceptions: [{ subject: exception.subject, reason: 'The wall must stay below 0.9 mm.' }],
    });
  });

  it('are not the bidder’s or an outsider’s to decide', async () => {
    await handIn(estimator, shopId, { exceptions: [exception] });
    const [row] = await test.db.select().from(bidException);
    for (const actor of [estimator, otherEstimator]) {
      await expect(
        decideException(test.db, actor, { exceptionId: row?.id ?? '', decision: 'accept', reason: '' }),
      ).rejects.toMatchObject({ code: 'not-found' });
    }
    const technician = await aMember(test.db, buyerId, ['technician']);
    await expect(
      decideException(test.db, technician, { exceptionId: row?.id ?? '', decision: 'accept', reason: '' }),
    ).rejects.toMatchObject({ code: 'not-allowed' });
    expect((await test.db.select().from(bidException))[0]?.state).toBe('open');
  });
});

describe('the award', () => {
  it('makes the order, its milestones to the cent, and tells winner and others', async () => {
    const won = await handIn(estimator, shopId);
    await handIn(otherEstimator, otherId);
    const outcome = await awardBid(test.db, purchaser, { bidId: won.id, version: won.version });
    expect(outcome.kind).toBe('awarded');
    const [order] = await test.db.select().from(coilOrder);
    expect(order).toMatchObject({ totalAmount: 230_265, state: 'to-acknowledge', bidId: won.id });
    const amounts = (await test.db.select().from(milestone).orderBy(milestone.position)).map((m) => m.amount);
    expect(amounts).toEqual([46_053, 115_133, 69_079]);
    expect(await mailsOf('awarded')).toEqual([builder.email, estimator.email].sort());
    expect(await mailsOf('not-selected')).toContain(otherEstimator.email);
    const states = await test.db
      .select({ state: request.state })
      .from(request)
      .where(eq(request.id, requestId));
    expect(states[0]?.state).toBe('awarded');
  });

  it('is won by exactly one of two at one moment', async () => {
    const a = await handIn(estimator, shopId);
    const b = await handIn(otherEstimator, otherId);
    const owner = await aMember(test.db, buyerId, ['owner']);
    const second = test.openAnother();
    const outcomes = await Promise.allSettled([
      awardBid(test.db, purchaser, { bidId: a.id, version: a.version }),
      awardBid(second, owner, { bidId: b.id, version: b.version }),
    ]);
    expect(outcomes.filter((outcome) => outcome.status === 'fulfilled')).toHaveLength(1);
    expect(await test.db.select().from(coilOrder)).toHaveLength(1);
    expect(await test.db.select().from(bid).where(eq(bid.state, 'awarded'))).toHaveLength(1);
  });

  it('needs a payout account that can receive', async () => {
    const thirdId = await aCompany(test.db, 'fabricator', { verified: true });
    const third = await aMember(test.db, thirdId, ['owner']);
    const saved = await handIn(third, thirdId);
    await expect(awardBid(test.db, purchaser, { bidId: saved.id, version: saved.version })).rejects.toThrow(
      /payout account/,
    );
  });

  it('is refused to engineer, bidder and outsider, and nothing changes', async () => {
    const saved = await handIn(estimator, shopId);
    await expect(
      awardBid(test.db, engineer, { bidId: saved.id, version: saved.version }),
    ).rejects.toMatchObject({ code: 'not-allowed' });
    for (const actor of [estimator, otherEstimator]) {
      await expect(
        awardBid(test.db, actor, { bidId: saved.id, version: saved.version }),
      ).rejects.toMatchObject({ code: 'not-found' });
    }
    expect(await test.db.select().from(coilOrder)).toHaveLength(0);
    expect((await test.db.select().from(bid))[0]?.state).toBe('submitted');
  });

  it('does not reach a withdrawn bid', async () => {
    const saved = await handIn(estimator, shopId);
    await withdrawBid(test.db, estimator, { bidId: saved.id, version: saved.version });
    expect(await mailsOf('bid-withdrawn')).toHaveLength(2);
    await expect(
      awardBid(test.db, purchaser, { bidId: saved.id, version: saved.version + 1 }),
    ).rejects.toMatchObject({ code: 'state-conflict' });
  });
});

describe('after an order fell through', () => {
  it('the buyer turns to another bid, its bidder confirms, and it is awarded', async () => {
    const first = await handIn(estimator, shopId);
    const second = await handIn(otherEstimator, otherId);
    const outcome = await awardBid(test.db, purchaser, { bidId: first.id, version: first.version });
    if (outcome.kind !== 'awarded') throw new Error('not awarded');
    await declineOrder(test.db, estimator, { orderId: outcome.orderId, reason: 'The mandrel is broken.' });
    const states = await test.db
      .select({ state: request.state })
      .from(request)
      .where(eq(request.id, requestId));
    expect(states[0]?.state).toBe('re-opened');
    const [passed] = await test.db.select().from(bid).where(eq(bid.id, second.id));
    const seen = { bidId: second.id, version: passed?.version ?? 0 };
    await expect(askBidAgain(test.db, engineer, seen)).rejects.toMatchObject({ code: 'not-allowed' });
    await expect(askBidAgain(test.db, otherEstimator, seen)).rejects.toMatchObject({ code: 'not-found' });
    const asked = await askBidAgain(test.db, purchaser, seen);
    expect(await mailsOf('bid-asked-again')).toContain(otherEstimator.email);
    await expect(awardBid(test.db, purchaser, { bidId: second.id, version: asked.version })).rejects.toThrow(
      /confirm/,
    );
    const confirmed = await confirmBid(test.db, otherEstimator, { bidId: second.id, version: asked.version });
    const again = await awardBid(test.db, purchaser, { bidId: second.id, version: confirmed.version });
    expect(again.kind).toBe('awarded');
    expect(await test.db.select().from(coilOrder)).toHaveLength(2);
  });
});

describe('above the company’s limit', () => {
  let limitedId: string;
  let first: Actor;
  let second: Actor;
  let limitedRequest: string;

  beforeEach(async () => {
    limitedId = await aCompany(test.db, 'buyer', { approvalLimit: 200_000 });
    first = await aMember(test.db, limitedId, ['purchaser']);
    second = await aMember(test.db, limitedId, ['owner']);
    ({ requestId: limitedRequest } = await aPostedRequest(test.db, second, limitedId));
    requestId = limitedRequest;
  });

  it('a second member approves, and only then the order is made', async () => {
    const saved = await handIn(estimator, shopId);
    const asked = await awardBid(test.db, first, { bidId: saved.id, version: saved.version });
    expect(asked.kind).toBe('approval-asked');
    expect(await mailsOf('approval-needed')).toEqual([second.email]);
    expect(await test.db.select().from(coilOrder)).toHaveLength(0);
    const [row] = await test.db.select().from(approval);
    await expect(
      decideApproval(test.db, first, { approvalId: row?.id ?? '', decision: 'give', reason: '' }),
    ).rejects.toMatchObject({ code: 'not-allowed' });
    const outcome = await decideApproval(test.db, second, {
      approvalId: row?.id ?? '',
      decision: 'give',
      reason: '',
    });
    expect(outcome.kind).toBe('awarded');
    expect(await test.db.select().from(coilOrder)).toHaveLength(1);
  });

  it('a refusal with its reason leaves the bid as it was and tells the asker', async () => {
    const saved = await handIn(estimator, shopId);
    await awardBid(test.db, first, { bidId: saved.id, version: saved.version });
    const [row] = await test.db.select().from(approval);
    const outcome = await decideApproval(test.db, second, {
      approvalId: row?.id ?? '',
      decision: 'refuse',
      reason: 'Too dear this quarter.',
    });
    expect(outcome.kind).toBe('refused');
    expect(await mailsOf('approval-refused')).toEqual([first.email]);
    expect(
      await test.db
        .select()
        .from(bid)
        .where(and(eq(bid.id, saved.id), eq(bid.state, 'submitted'))),
    ).toHaveLength(1);
  });
});
