import fc from 'fast-check';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { AppError } from '../../../src/lib/domain/errors.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import {
  answerOffer,
  offerSettlement,
  openDispute,
  withdrawDispute,
} from '../../../src/lib/server/disputes/index.ts';
import {
  booksOf,
  fundMilestone,
  heldBalance,
  reconcile,
  recoverOperations,
  releaseMilestone,
} from '../../../src/lib/server/money/index.ts';
import { openDisputesOf } from '../../../src/lib/server/orders/index.ts';
import { milestoneRow, moneyWorld, type MoneyWorld } from '../../support/money.ts';
import {
  aCast,
  anOrder,
  approveDrawing,
  bringTo,
  readyPayout,
  type Cast,
  type TestOrder,
} from '../../support/orders.ts';

// Runs random sequences of acts and troubles on one milestone against the real modules and the stand-in,
// beside a model of a few lines. `MODEL_RUNS` and `MODEL_SEED` make longer runs and repeat one.

let world: MoneyWorld;
let cast: Cast;

beforeAll(async () => {
  world = await moneyWorld();
  cast = await aCast(world.db);
  await readyPayout(world, cast);
});
afterAll(() => world.close());

interface Model {
  order: TestOrder;
  money: 'unfunded' | 'paying' | 'held' | 'out';
  drawn: boolean;
  disputed: boolean;
}

const acts = [
  'fund',
  'pay',
  'draw',
  'release',
  'dispute',
  'withdraw',
  'settle',
  'work',
  'trouble',
  'recover',
] as const;
type Act = (typeof acts)[number];

const faults = [
  'error-500',
  'cut-after-effect',
  'cut-body',
  'rate-limit-429',
  'error-500-after-effect',
] as const;

/** True when the act was let through; an expected refusal is false; anything else is thrown. */
async function tried(work: () => Promise<unknown>): Promise<boolean> {
  try {
    await work();
    return true;
  } catch (problem) {
    if (problem instanceof AppError) return false;
    throw problem;
  }
}

async function disputeOf(id: string): Promise<string> {
  return (await openDisputesOf(world.db, { milestoneId: id }))[0]?.id ?? newId();
}

async function perform(model: Model, act: Act, n: number): Promise<void> {
  const { db } = world;
  const id = model.order.milestone.drawing;
  switch (act) {
    case 'fund': {
      const may = model.money === 'unfunded' || model.money === 'paying';
      expect(await tried(() => fundMilestone(db, cast.purchaser, { milestoneId: id }))).toBe(may);
      if (may) model.money = 'paying';
      return;
    }
    case 'pay':
      if (model.money !== 'paying') return;
      await world.pay(id);
      await world.settle();
      model.money = 'held';
      return;
    case 'draw': {
      const may = model.money === 'held' && !model.drawn;
      if (!may) return;
      model.drawn = await tried(() => approveDrawing(db, cast, model.order));
      expect(model.drawn).toBe(true);
      return;
    }
    case 'release': {
      const may = model.money === 'held' && model.drawn && !model.disputed;
      expect(await tried(() => releaseMilestone(db, cast.purchaser, { milestoneId: id }))).toBe(may);
      if (may) model.money = 'out';
      return;
    }
    case 'dispute': {
      const may = model.money === 'held' && !model.disputed;
      const claim = () =>
        openDispute(db, n % 2 === 0 ? cast.purchaser : cast.shopOwner, {
          milestoneId: id,
          reason: 'other',
          complaintAbout: 'Drawing',
          pieceId: null,
          amountClaimed: 1,
          text: 'A stop.',
          fileIds: [],
          commandId: newId(),
        });
      expect(await tried(claim)).toBe(may);
      if (may) model.disputed = true;
      return;
    }
    case 'withdraw': {
      const disputeId = await disputeOf(id);
      // Either side may have opened it: exactly one of both can take it back.
      const first = await tried(() => withdrawDispute(db, cast.purchaser, { disputeId }));
      const second = await tried(() => withdrawDispute(db, cast.shopOwner, { disputeId }));
      expect(first || second).toBe(model.disputed);
      model.disputed = false;
      return;
    }
    case 'settle': {
      if (!model.disputed) return;
      const disputeId = await disputeOf(id);
      const held = await heldBalance(db, id);
      const release = n % (held + 1);
      const { offerId } = await offerSettlement(db, cast.purchaser, {
        disputeId,
        release,
        refund: held - release,
        note: '',
        commandId: newId(),
      });
      await answerOffer(db, cast.shopOwner, { offerId, answer: 'accept' });
      model.disputed = false;
      model.money = 'out';
      return;
    }
    case 'work':
      await world.work();
      return;
    case 'trouble':
      await world.control('POST', 'faults', {
        kind: faults[n % faults.length],
        times: 1 + (n % 2),
        method: 'POST',
        path: n % 3 === 0 ? '/v1/refunds' : '/v1/transfers',
      });
      return;
    case 'recover':
      await recoverOperations(db, { now: Number.MAX_SAFE_INTEGER });
  }
}

async function comeToRest(): Promise<void> {
  await world.control('DELETE', 'faults');
  for (let round = 0; round < 3; round += 1) {
    await recoverOperations(world.db, { now: Number.MAX_SAFE_INTEGER });
    await world.settle();
  }
}

const runs = Number(process.env['MODEL_RUNS'] ?? 25);
const seed = process.env['MODEL_SEED'] === undefined ? undefined : Number(process.env['MODEL_SEED']);

test('any sequence of acts and troubles keeps the books whole and moves money once', async () => {
  const step = fc.record({ act: fc.constantFrom(...acts), n: fc.nat(1_000_000) });
  await fc.assert(
    fc.asyncProperty(fc.array(step, { minLength: 10, maxLength: 40 }), async (steps) => {
      const order = await anOrder(world.db, cast);
      await bringTo(world, cast, order, 'acknowledged');
      const model: Model = { order, money: 'unfunded', drawn: false, disputed: false };
      // The beginning of every order, so that most sequences get to the money.
      for (const { act, n } of [{ act: 'fund', n: 0 } as const, { act: 'pay', n: 0 } as const, ...steps]) {
        await perform(model, act, n);
      }
      await comeToRest();
      const row = await milestoneRow(world.db, order.milestone.drawing);
      const books = (await booksOf(world.db, [row.id])).get(row.id);
      if (model.money === 'held') {
        expect([row.money, books?.held]).toEqual(['held', row.amount]);
      } else {
        expect(['released', 'refunded', 'split']).toContain(row.money);
        expect(books?.held).toBe(0);
        const out = (books?.released ?? 0) + (books?.fees ?? 0) + (books?.refunded ?? 0);
        expect(out).toBe(row.amount);
      }
      const transfers = (await world.stripe.transfers.list({ transfer_group: order.orderId })).data;
      expect(transfers.reduce((sum, t) => sum + t.amount, 0)).toBe(books?.released);
    }),
    { numRuns: runs, ...(seed === undefined ? {} : { seed }), endOnFailure: true },
  );
  expect((await reconcile(world.db)).differences).toEqual([]);
}, 600_000);
