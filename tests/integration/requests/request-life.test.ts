import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { dayMs, hourMs } from '../../../src/lib/domain/dates.ts';
import { businessNow, moveClock } from '../../../src/lib/server/adapters/clock.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { closeSolvePool } from '../../../src/lib/server/checks/index.ts';
import { saveBid, submitBid } from '../../../src/lib/server/bids/index.ts';
import { bid } from '../../../src/lib/server/db/schema/bids.ts';
import { outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { question } from '../../../src/lib/server/db/schema/requests.ts';
import type { SendMail } from '../../../src/lib/server/outbox/index.ts';
import { requestForUpdate } from '../../../src/lib/server/requests/index.ts';
import { boardPage, requestPage } from '../../../src/lib/server/search/index.ts';
import { answerQuestion, askQuestion } from '../../../src/lib/server/workflows/request-questions.ts';
import { runRequestDeadlines } from '../../../src/lib/server/workflows/request-deadlines.ts';
import { drainJobs } from '../../../src/lib/server/workflows/run-worker.ts';
import { withdrawRequest } from '../../../src/lib/server/workflows/withdraw-request.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aFullDraft, postDraft } from '../../support/drafts.ts';
import { aCompany, aMember } from '../../support/people.ts';
import { refusalCode } from '../../support/refusal.ts';
import { bidValues } from '../../support/requests.ts';

let test: TestDatabase;
let buyerId: string;
let shopId: string;
let rivalId: string;
let engineer: Actor;
let technician: Actor;
let outsider: Actor;
let estimator: Actor;
let builder: Actor;
let rival: Actor;
let unverified: Actor;

beforeEach(async () => {
  test = await testDatabase();
  buyerId = await aCompany(test.db, 'buyer', { name: 'Millrace Driveline' });
  shopId = await aCompany(test.db, 'fabricator', { name: 'Copperfold Works', verified: true });
  rivalId = await aCompany(test.db, 'fabricator', { name: 'Tallow Bend Shop', verified: true });
  engineer = await aMember(test.db, buyerId, ['engineer']);
  technician = await aMember(test.db, buyerId, ['technician']);
  outsider = await aMember(test.db, await aCompany(test.db, 'buyer'), ['owner']);
  estimator = await aMember(test.db, shopId, ['estimator'], { email: 'estimator@copperfold.example' });
  builder = await aMember(test.db, shopId, ['builder']);
  rival = await aMember(test.db, rivalId, ['owner'], { email: 'owner@tallow.example' });
  unverified = await aMember(test.db, await aCompany(test.db, 'fabricator'), ['owner']);
});
afterEach(() => test.close());
afterAll(() => closeSolvePool());

async function posted(values: Record<string, string> = {}): Promise<string> {
  const draft = await aFullDraft(test.db, engineer, buyerId, { values });
  await postDraft(test.db, engineer, draft);
  return draft.id;
}

async function mails(kind: string) {
  const rows = await test.db.select().from(outboxMail).where(eq(outboxMail.kind, kind));
  return rows.map((row) => row.toEmail).sort();
}

const taken: string[] = [];
const send: SendMail = (mail) => {
  taken.push(`${mail.to} ${mail.subject} ${mail.text} ${mail.html}`);
  return Promise.resolve();
};

const ask = (requestId: string, actor: Actor, companyId: string, kind: 'clarification' | 'proposal') =>
  askQuestion(test.db, actor, {
    requestId,
    companyId,
    commandId: newId(),
    kind,
    text: kind === 'proposal' ? 'May we use a square tube?' : 'Is the end face ground?',
  });

describe('a posted request', () => {
  it('is told to verified fabricators once, without budget or own numbers', async () => {
    taken.length = 0;
    await posted();
    await drainJobs(test.db, { send });
    await drainJobs(test.db, { send });
    expect(await mails('request-posted')).toEqual(['estimator@copperfold.example', 'owner@tallow.example']);
    expect(taken.join('\n')).toContain('/requests/');
    expect(taken.join('\n')).not.toMatch(/7777|7,777|SECRET/);
  });

  it('stands on the board of verified fabricators alone and is found by words, shape, tube and material', async () => {
    const id = await posted();
    const found = async (filter: Parameters<typeof boardPage>[2]) =>
      (await boardPage(test.db, estimator, filter)).items.map((item) => item.id);
    expect(await found({})).toEqual([id]);
    expect(await found({ text: 'shaft harden' })).toEqual([id]);
    expect(await found({ text: 'millrace' })).toEqual([id]);
    expect(await found({ text: 'pancake' })).toEqual([]);
    expect(await found({ text: '" OR 1=1 -- *' })).toEqual([]);
    expect(await found({ shape: 'helix', material: 'steel-c45' })).toEqual([id]);
    expect(await found({ shape: 'pancake' })).toEqual([]);
    expect(await found({ tubeMin: 0.01, tubeMax: 0.01 })).toEqual([id]);
    expect(await found({ tubeMin: 0.0101 })).toEqual([]);
    expect(await found({ quantityMin: 2 })).toEqual([]);
    expect(await found({ closesWithinDays: 3 })).toEqual([]);
    expect(await found({ closesWithinDays: 20 })).toEqual([id]);
    expect(await refusalCode(boardPage(test.db, unverified, {}))).toBe('company-not-verified');
    expect(await refusalCode(boardPage(test.db, outsider, {}))).toBe('not-allowed');
  });

  it('pages the board without losing or repeating a request', async () => {
    for (let index = 0; index < 27; index += 1) await posted();
    const first = await boardPage(test.db, estimator, {});
    expect(first.items).toHaveLength(25);
    const second = await boardPage(test.db, estimator, { after: first.next ?? '' });
    expect(second.items).toHaveLength(2);
    expect(second.next).toBeNull();
    expect(new Set([...first.items, ...second.items].map((item) => item.id)).size).toBe(27);
  });

  it('never shows budget, own order number or cost centre to a bidder', async () => {
    const id = await posted();
    const board = JSON.stringify(await boardPage(test.db, estimator, {}));
    const page = JSON.stringify(await requestPage(test.db, estimator, id));
    for (const text of [board, page]) {
      expect(text).not.toMatch(/budget/i);
      expect(text).not.toContain('777777');
      expect(text).not.toContain('SECRET');
    }
    const own = await requestPage(test.db, engineer, id);
    expect(own.side === 'buyer' && own.request.commercial?.budget).toBe(777777);
  });

  it('does not exist for other buyers, and unverified fabricators are told why', async () => {
    const id = await posted();
    expect(await refusalCode(requestPage(test.db, outsider, id))).toBe('not-found');
    expect(await refusalCode(requestPage(test.db, unverified, id))).toBe('company-not-verified');
    const draft = await aFullDraft(test.db, engineer, buyerId);
    expect(await refusalCode(requestPage(test.db, estimator, draft.id))).toBe('not-found');
  });
});

describe('questions', () => {
  it('reach the buyer; a clarification comes back to all bidders without the asker’s name', async () => {
    const id = await posted();
    const { id: questionId } = await ask(id, estimator, shopId, 'clarification');
    await ask(id, rival, rivalId, 'clarification');
    expect((await mails('question-asked')).length).toBe(2);
    const before = await requestPage(test.db, rival, id);
    expect(before.side === 'bidder' && before.request.questions.map((one) => one.mine)).toEqual([true]);
    await answerQuestion(test.db, engineer, { questionId, version: 1, answer: 'Yes, to 0.02 mm.' });
    expect(await mails('question-answered')).toEqual([
      'estimator@copperfold.example',
      'owner@tallow.example',
    ]);
    const after = await requestPage(test.db, rival, id);
    expect(JSON.stringify(after)).toContain('Yes, to 0.02 mm.');
    expect(JSON.stringify(after)).not.toMatch(/Copperfold/);
    const rows = await test.db.select().from(outboxMail).where(eq(outboxMail.kind, 'question-answered'));
    expect(rows.map((row) => row.body).join()).not.toMatch(/Copperfold/);
  });

  it('of the kind proposal stay between buyer and bidder', async () => {
    const id = await posted();
    const { id: questionId } = await ask(id, estimator, shopId, 'proposal');
    await ask(id, rival, rivalId, 'clarification');
    await answerQuestion(test.db, engineer, {
      questionId,
      version: 1,
      answer: 'Put it into the bid as an exception.',
    });
    expect(await mails('question-answered')).toEqual(['estimator@copperfold.example']);
    expect(JSON.stringify(await requestPage(test.db, rival, id))).not.toMatch(/square tube|as an exception/);
    expect(JSON.stringify(await requestPage(test.db, estimator, id))).toMatch(/as an exception/);
  });

  it('are asked by estimators and owners of verified fabricators, while bids are open', async () => {
    const id = await posted();
    expect(await refusalCode(ask(id, builder, shopId, 'clarification'))).toBe('not-allowed');
    expect(await refusalCode(ask(id, estimator, rivalId, 'clarification'))).toBe('not-found');
    expect(await refusalCode(ask(id, engineer, buyerId, 'clarification'))).toBe('not-allowed');
    const theirs = unverified.memberships[0]?.companyId ?? '';
    expect(await refusalCode(ask(id, unverified, theirs, 'clarification'))).toBe('company-not-verified');
    await moveClock(test.db, 30 * dayMs);
    expect(await refusalCode(ask(id, estimator, shopId, 'clarification'))).toBe('state-conflict');
    expect(await test.db.select().from(question)).toHaveLength(0);
  });

  it('are answered once, by engineers, purchasers and owners of the buyer', async () => {
    const id = await posted();
    const { id: questionId } = await ask(id, estimator, shopId, 'clarification');
    const answer = { questionId, version: 1, answer: 'Yes.' };
    expect(await refusalCode(answerQuestion(test.db, technician, answer))).toBe('not-allowed');
    expect(await refusalCode(answerQuestion(test.db, outsider, answer))).toBe('not-found');
    expect(await refusalCode(answerQuestion(test.db, estimator, answer))).toBe('not-found');
    await answerQuestion(test.db, engineer, answer);
    expect(await refusalCode(answerQuestion(test.db, engineer, { ...answer, answer: 'No.' }))).toBe(
      'state-conflict',
    );
    const [row] = await test.db.select().from(question);
    expect(row?.answer).toBe('Yes.');
  });

  it('asked twice by one press are one question', async () => {
    const id = await posted();
    const input = {
      requestId: id,
      companyId: shopId,
      commandId: newId(),
      kind: 'clarification' as const,
      text: 'Is the end face ground?',
    };
    const first = await askQuestion(test.db, estimator, input);
    expect((await askQuestion(test.db, estimator, input)).id).toBe(first.id);
    expect(await test.db.select().from(question)).toHaveLength(1);
  });
});

async function aBid(requestId: string, actor: Actor, companyId: string) {
  const values = bidValues('2099-12-31');
  const saved = await saveBid(test.db, actor, {
    requestId,
    companyId,
    commandId: newId(),
    version: null,
    values,
  });
  return submitBid(test.db, actor, {
    requestId,
    companyId,
    commandId: newId(),
    version: saved.version,
    values,
  });
}

describe('time', () => {
  it('reminds bidders once, then closes at the end of the day in the buyer’s zone', async () => {
    const id = await posted();
    await ask(id, estimator, shopId, 'clarification');
    const row = await requestForUpdate(test.db, id);
    const closesAt = row.closesAt ?? 0;
    // Berlin is an hour ahead of UTC in December: the day ends at 23:00 UTC.
    expect(new Date(closesAt).getUTCHours() % 22).toBeLessThan(2);
    await moveClock(test.db, closesAt - (await businessNow(test.db)) - 47 * hourMs);
    await runRequestDeadlines(test.db);
    await runRequestDeadlines(test.db);
    expect(await mails('bids-close-soon')).toEqual(['estimator@copperfold.example']);
    expect((await requestForUpdate(test.db, id)).state).toBe('posted');
    await moveClock(test.db, 48 * hourMs);
    await runRequestDeadlines(test.db);
    await runRequestDeadlines(test.db);
    expect((await requestForUpdate(test.db, id)).state).toBe('closed');
    expect((await boardPage(test.db, estimator, {})).items).toEqual([]);
    expect((await mails('bids-closed')).length).toBe(1);
    // Who asked may still read it; who did nothing may not.
    expect((await requestPage(test.db, estimator, id)).side).toBe('bidder');
    expect(await refusalCode(requestPage(test.db, rival, id))).toBe('not-found');
  });

  it('takes a request off the board at its closing, even before the worker has run', async () => {
    const id = await posted();
    await moveClock(test.db, 30 * dayMs);
    expect((await boardPage(test.db, estimator, {})).items).toEqual([]);
    expect(await refusalCode(requestPage(test.db, rival, id))).toBe('not-found');
  });

  it('lets a request lapse that nobody awarded for ninety days', async () => {
    const id = await posted();
    await ask(id, estimator, shopId, 'clarification');
    await moveClock(test.db, 20 * dayMs);
    await runRequestDeadlines(test.db);
    await moveClock(test.db, 95 * dayMs);
    await runRequestDeadlines(test.db);
    expect((await requestForUpdate(test.db, id)).state).toBe('lapsed');
    expect((await mails('request-lapsed')).length).toBe(2);
  });
});

describe('withdrawing', () => {
  it('tells bidders the reason, lapses their bids and empties the board', async () => {
    const id = await posted();
    await aBid(id, estimator, shopId);
    await ask(id, rival, rivalId, 'clarification');
    const { version } = await requestForUpdate(test.db, id);
    expect(
      await refusalCode(withdrawRequest(test.db, engineer, { requestId: id, version, reason: ' ' })),
    ).toBe('invalid-input');
    await withdrawRequest(test.db, engineer, { requestId: id, version, reason: 'The part was redesigned.' });
    expect((await requestForUpdate(test.db, id)).state).toBe('withdrawn');
    expect((await test.db.select({ state: bid.state }).from(bid)).map((row) => row.state)).toEqual([
      'lapsed',
    ]);
    expect(await mails('request-withdrawn')).toEqual([
      'estimator@copperfold.example',
      'owner@tallow.example',
    ]);
    expect((await boardPage(test.db, estimator, {})).items).toEqual([]);
    expect(JSON.stringify(await requestPage(test.db, estimator, id))).toContain('The part was redesigned.');
  });

  it('is for engineers, purchasers and owners of the buyer, on the version they saw', async () => {
    const id = await posted();
    const { version } = await requestForUpdate(test.db, id);
    const input = { requestId: id, version, reason: 'No longer needed.' };
    expect(await refusalCode(withdrawRequest(test.db, technician, input))).toBe('not-allowed');
    expect(await refusalCode(withdrawRequest(test.db, outsider, input))).toBe('not-found');
    expect(await refusalCode(withdrawRequest(test.db, estimator, input))).toBe('not-found');
    expect(await refusalCode(withdrawRequest(test.db, engineer, { ...input, version: version - 1 }))).toBe(
      'version-conflict',
    );
    expect((await requestForUpdate(test.db, id)).state).toBe('posted');
  });

  it('discards a draft without a word to anyone', async () => {
    const draft = await aFullDraft(test.db, engineer, buyerId);
    await withdrawRequest(test.db, engineer, { requestId: draft.id, version: draft.version, reason: '' });
    expect((await requestForUpdate(test.db, draft.id)).state).toBe('withdrawn');
    expect(await mails('request-withdrawn')).toEqual([]);
  });
});
