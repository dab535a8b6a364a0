import { afterAll, afterEach, beforeEach, expect, it } from 'vitest';
import { dayMs } from '../../../src/lib/domain/dates.ts';
import { moveClock } from '../../../src/lib/server/adapters/clock.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { closeSolvePool } from '../../../src/lib/server/checks/index.ts';
import { runRequestDeadlines } from '../../../src/lib/server/workflows/request-deadlines.ts';
import { requestDeskItems } from '../../../src/lib/server/workflows/request-desk.ts';
import { askQuestion } from '../../../src/lib/server/workflows/request-questions.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aFullDraft, postDraft } from '../../support/drafts.ts';
import { aCompany, aMember } from '../../support/people.ts';

let test: TestDatabase;
beforeEach(async () => {
  test = await testDatabase();
});
afterEach(() => test.close());
afterAll(() => closeSolvePool());

it('shows each person what waits for them about requests, and for whom they wait', async () => {
  const { db } = test;
  const buyerId = await aCompany(db, 'buyer');
  const engineer = await aMember(db, buyerId, ['engineer']);
  const purchaser = await aMember(db, buyerId, ['purchaser']);
  const stranger = await aMember(db, await aCompany(db, 'buyer'), ['owner']);
  const shopId = await aCompany(db, 'fabricator', { verified: true });
  const estimator = await aMember(db, shopId, ['estimator']);
  const titles = async (actor: typeof engineer) =>
    (await requestDeskItems(db, actor)).map((item) => `${item.waitsFor}: ${item.title}`).sort();

  const draft = await aFullDraft(db, engineer, buyerId);
  expect(await titles(engineer)).toEqual(['me: Finish the draft']);
  expect(await titles(purchaser)).toEqual([]);
  await postDraft(db, engineer, draft);
  await askQuestion(db, estimator, {
    requestId: draft.id,
    companyId: shopId,
    commandId: newId(),
    kind: 'clarification',
    text: 'Is the end face ground?',
  });
  expect(await titles(engineer)).toEqual(['me: Answer a question', 'others: Hand in bids']);
  expect(await titles(estimator)).toEqual(['others: Answer your question']);
  await moveClock(db, 20 * dayMs);
  await runRequestDeadlines(db);
  expect(await titles(purchaser)).toContain('me: Compare the bids and award');
  expect(await titles(engineer)).toContain('others: Compare the bids and award');
  expect(await titles(stranger)).toEqual([]);
});
