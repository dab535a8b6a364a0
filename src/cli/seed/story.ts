import { eq } from 'drizzle-orm';
import { bid as bidTable } from '../../lib/server/db/schema/bids.ts';
import { question, request } from '../../lib/server/db/schema/requests.ts';
import { postMessage } from '../../lib/server/messages/index.ts';
import { heldBalance, releaseMilestone } from '../../lib/server/money/index.ts';
import { declineOrder } from '../../lib/server/workflows/end-order.ts';
import { answerEnd, proposeEnd } from '../../lib/server/workflows/end-proposals.ts';
import { answerQuestion, askQuestion } from '../../lib/server/workflows/request-questions.ts';
import { withdrawRequest } from '../../lib/server/workflows/withdraw-request.ts';
import { foundShop } from './cast.ts';
import { contract, toBuild, toShipped, type Contract } from './deal.ts';
import { decidedDispute, openDispute } from './disputes.ts';
import { brazingMachine, hardeningMachine, shrinkMachine } from './requirements.ts';
import { plans, setTheScene, type Scene } from './scene.ts';
import { record } from './records.ts';
import * as step from './steps.ts';
import type { SeedWorld } from './world.ts';

/** Orders that ran long ago: one done, one whose dispute was decided. */
async function past(world: SeedWorld, scene: Scene) {
  const { millrace, fennick, copperfold, tallow } = scene;
  // Nobody was awarded; ninety days after its closing the request lapses by itself.
  await world.daysAgo(119);
  await step.post(world, fennick, { ...plans.ring(scene, 'Coil for coupling halves'), closesInDays: 3 });

  const first: Contract = {
    buyer: millrace,
    shop: copperfold,
    plan: plans.shaft(scene, 'Hardening coil for 40 mm shaft journal'),
    price: { coil: 214_000, freight: 9_500, vatBp: 1900, days: 20 },
  };
  const a = await contract(world, 110, first);
  await toBuild(world, 104, first, a.orderId);
  const shipped = await toShipped(world, 90, first, a.orderId);
  await world.daysAgo(85);
  await step.receive(world, millrace.technician, shipped);
  await world.daysAgo(80);
  await releaseMilestone(world.db, millrace.purchaser, {
    milestoneId: await step.milestoneId(world, a.orderId, 'delivery'),
  });
  await world.settle();

  const second: Contract = {
    buyer: fennick,
    shop: tallow,
    plan: plans.ring(scene, 'Coil for bearing ring, 130 mm'),
    price: { coil: 165_000, freight: 14_000, days: 15 },
  };
  const b = await contract(world, 78, second);
  await toBuild(world, 73, second, b.orderId);
  await decidedDispute(world, { ...scene, buyer: fennick, shop: tallow, orderId: b.orderId, days: 60 });
}

/** Orders under way, one in each stage. */
async function underWay(world: SeedWorld, scene: Scene) {
  const { millrace, kestrelmoor, fennick, copperfold, tallow } = scene;
  const disputed: Contract = {
    buyer: millrace,
    shop: copperfold,
    plan: plans.pin(scene, 'Coil for 32 mm pins, second cell'),
    price: { coil: 158_000, freight: 9_500, vatBp: 1900, days: 15 },
  };
  const d = await contract(world, 42, disputed);
  await toBuild(world, 38, disputed, d.orderId);
  const there = await toShipped(world, 20, disputed, d.orderId);

  const travelling: Contract = {
    buyer: fennick,
    shop: copperfold,
    plan: plans.ring(scene, 'Spare coil for shrink cart'),
    price: { coil: 188_000, freight: 22_000, days: 18 },
  };
  const e = await contract(world, 36, travelling);
  await toBuild(world, 30, travelling, e.orderId);

  await world.daysAgo(16);
  await step.receive(world, millrace.technician, there);
  await world.daysAgo(14);
  await openDispute(world, { buyer: millrace, shop: copperfold, orderId: d.orderId });

  const waiting: Contract = {
    buyer: kestrelmoor,
    shop: tallow,
    plan: plans.tip(scene, 'Tip brazing coils, pair'),
    price: { coil: 92_000, freight: 4_500, vatBp: 2000, days: 10 },
  };
  const w = await contract(world, 13, waiting);
  await toBuild(world, 8.5, waiting, w.orderId);

  const drawing: Contract = {
    buyer: millrace,
    shop: tallow,
    plan: plans.pin(scene, 'Coil for 32 mm pins, spare'),
    price: { coil: 149_000, freight: 12_000, days: 15 },
  };
  const q = await contract(world, 7.2, drawing);
  await step.acknowledge(world, tallow, q.orderId);
  await toShipped(world, 3, travelling, e.orderId);
  await record(world, tallow, w.orderId);
  await step.submitBuild(world, tallow, w.orderId);
  await step.fund(world, millrace, q.orderId, 'drawing');
  const revisionA = await step.sendDrawing(
    world,
    tallow,
    q.orderId,
    drawing.plan.requirement,
    drawing.plan.title,
  );
  await world.daysAgo(0.8);
  await step.judge(world, millrace, revisionA, 'The lead spacing is 2 mm wider than the connection plate.');
  await world.daysAgo(0.6);
  await step.sendDrawing(world, tallow, q.orderId, drawing.plan.requirement, drawing.plan.title, 'B');
  await postMessage(world.db, tallow.builder, q.orderId, {
    commandId: world.command(),
    text: 'Revision B has the spacing of your plate; everything else is unchanged.',
    files: [],
  });
}

/** Orders that did not come about: one ended by agreement, one declined, so that its request is open again. */
async function fellThrough(world: SeedWorld, scene: Scene) {
  const { kestrelmoor, millrace, copperfold, tallow } = scene;
  const ended: Contract = {
    buyer: kestrelmoor,
    shop: copperfold,
    plan: plans.tip(scene, 'Tip brazing coils, old bench'),
    price: { coil: 71_000, freight: 7_500, days: 12 },
  };
  const a = await contract(world, 52, ended);
  await step.acknowledge(world, copperfold, a.orderId);
  await step.fund(world, kestrelmoor, a.orderId, 'drawing');
  await world.daysAgo(47);
  const drawing = await step.milestoneId(world, a.orderId, 'drawing');
  const held = await heldBalance(world.db, drawing);
  const { proposalId } = await proposeEnd(world.db, kestrelmoor.purchaser, {
    orderId: a.orderId,
    parts: [{ milestoneId: drawing, release: 0, refund: held }],
    workInHand: 'Nothing was begun.',
    reason: 'The old bench is taken out of use.',
    commandId: world.command(),
  });
  await answerEnd(world.db, copperfold.owner, { proposalId, answer: 'accept' });
  await world.settle();

  const declined: Contract = {
    buyer: millrace,
    shop: tallow,
    plan: plans.pin(scene, 'Coil for 32 mm pins, trial'),
    price: { coil: 131_000, freight: 12_000, days: 8 },
  };
  const b = await contract(world, 46.5, declined);
  await declineOrder(world.db, tallow.estimator, {
    orderId: b.orderId,
    reason: 'The tube of this size will not arrive before the need-by date.',
  });
  await world.settle();
}

/** Requests in the states that come before an award, and what is without one. */
async function requests(world: SeedWorld, scene: Scene) {
  const { kestrelmoor, fennick, copperfold, tallow } = scene;
  await world.daysAgo(6);
  const closing = await step.post(world, kestrelmoor, {
    ...plans.tip(scene, 'Tip brazing coil for the new bench'),
    closesInDays: 4,
  });
  await world.daysAgo(5.5);
  await step.bid(world, copperfold, closing, { coil: 84_000, freight: 7_500, days: 12 });
  await step.bid(world, tallow, closing, { coil: 79_500, freight: 3_800, vatBp: 2000, days: 16 });

  await world.daysAgo(5);
  const withdrawn = await step.post(world, fennick, plans.ring(scene, 'Coil for gear blanks'));
  await world.daysAgo(4);
  const [row] = await world.db.select().from(request).where(eq(request.id, withdrawn));
  await withdrawRequest(world.db, fennick.engineer, {
    requestId: withdrawn,
    version: row?.version ?? 0,
    reason: 'The gear is bought finished from now on.',
  });
}

/** What is open today. */
async function openNow(world: SeedWorld, scene: Scene) {
  const { millrace, kestrelmoor, fennick, copperfold, tallow } = scene;
  await world.daysAgo(0.5);
  const open = await step.post(world, millrace, {
    ...plans.shaft(scene, 'Coil for 40 mm shaft, third cell'),
    closesInDays: 12,
    budget: '4200',
  });
  await step.bid(world, copperfold, open, {
    coil: 226_000,
    freight: 9_500,
    vatBp: 1900,
    days: 18,
    exceptions: [
      { subject: 'Leads and connection', text: 'Plate 28 mm wide instead of 30 mm, same hole pattern.' },
    ],
  });
  await step.bid(world, tallow, open, { coil: 205_000, freight: 16_000, days: 25 });
  const { id } = await askQuestion(world.db, tallow.estimator, {
    requestId: open,
    companyId: tallow.id,
    commandId: world.command(),
    kind: 'clarification',
    text: 'Is the flux on the connection plate to be removed by pickling?',
  });
  const [asked] = await world.db.select().from(question).where(eq(question.id, id));
  await answerQuestion(world.db, millrace.engineer, {
    questionId: id,
    version: asked?.version ?? 1,
    answer: 'Mechanically is enough; no acid in the tube.',
  });
  await askQuestion(world.db, copperfold.estimator, {
    requestId: open,
    companyId: copperfold.id,
    commandId: world.command(),
    kind: 'proposal',
    text: 'With a sixth turn the advised row would need one unit less. May we offer that?',
  });
  await step.post(world, fennick, {
    ...plans.ring(scene, 'Coil for 130 mm rings, line 2'),
    closesInDays: 20,
  });
  await step.draft(world, millrace, plans.pin(scene, 'Pins of the new driveline'));
  await step.draft(world, kestrelmoor, plans.tip(scene, 'Tips, larger shank'));

  const award: Contract = {
    buyer: kestrelmoor,
    shop: copperfold,
    plan: plans.tip(scene, 'Tip brazing coil, trial'),
    price: { coil: 68_000, freight: 7_500, days: 10 },
  };
  const requestId = await step.post(world, kestrelmoor, award.plan);
  const bid = await step.bid(world, copperfold, requestId, award.price);
  await step.award(world, kestrelmoor, bid);
}

/** The demo's invented story, told by the use-cases in the order in which it happened. */
export async function tellStory(world: SeedWorld, say: (line: string) => void): Promise<void> {
  say('People, companies, machines …');
  const scene = await setTheScene(world);
  const full: Scene = {
    ...scene,
    hardening: await step.enterMachine(world, scene.millrace, hardeningMachine()),
    brazing: await step.enterMachine(world, scene.kestrelmoor, brazingMachine()),
    shrinking: await step.enterMachine(world, scene.fennick, shrinkMachine()),
  };
  say('Finished orders …');
  await past(world, full);
  await fellThrough(world, full);
  say('Orders under way …');
  await underWay(world, full);
  say('Requests and bids …');
  await requests(world, full);
  await openNow(world, full);
  say('A fabricator waiting to be verified …');
  await foundShop(world, {
    name: 'Ninefold Inductors',
    short: 'Ninefold',
    currency: 'EUR',
    timeZone: 'Europe/Vienna',
    about: 'Machined single turns and helices.',
    taxNumber: '',
    statement: 'Machined inductors and wound coils for hardening, with dimensional reports.',
    address: { line1: 'Spulengasse 9', postalCode: '4020', city: 'Linz', country: 'AT' },
    shapes: ['helix', 'single-turn', 'bore'],
    work: ['machining', 'braze-silver'],
    tests: ['inductance', 'dimensions'],
    tubeMin: '5 mm',
    tubeMax: '16 mm',
  });
  await world.today();
  await world.settle();
  const bids = await world.db.select({ id: bidTable.id }).from(bidTable);
  say(`${bids.length} bids were handed in.`);
}
