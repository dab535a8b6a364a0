import { releaseMilestone } from '../../lib/server/money/index.ts';
import type { Buyer, Shop } from './cast.ts';
import { record } from './records.ts';
import * as step from './steps.ts';
import type { SeedWorld } from './world.ts';

export interface Contract {
  buyer: Buyer;
  shop: Shop;
  plan: step.RequestPlan;
  price: step.BidPlan;
}

/** Request, bid, award and acknowledgement, `days` ago. */
export async function contract(world: SeedWorld, days: number, { buyer, shop, plan, price }: Contract) {
  await world.daysAgo(days);
  const requestId = await step.post(world, buyer, plan);
  await world.daysAgo(days - 2);
  const made = await step.bid(world, shop, requestId, price);
  await world.daysAgo(days - 4);
  const orderId = await step.award(world, buyer, made);
  return { requestId, orderId };
}

export async function toBuild(world: SeedWorld, days: number, deal: Contract, orderId: string) {
  await step.acknowledge(world, deal.shop, orderId);
  await step.fund(world, deal.buyer, orderId, 'drawing');
  await world.daysAgo(days);
  const revision = await step.sendDrawing(world, deal.shop, orderId, deal.plan.requirement, deal.plan.title);
  await world.daysAgo(days - 1);
  await step.judge(world, deal.buyer, revision);
  await releaseMilestone(world.db, deal.buyer.purchaser, {
    milestoneId: await step.milestoneId(world, orderId, 'drawing'),
  });
  await world.settle();
  await step.fund(world, deal.buyer, orderId, 'build');
}

export async function toShipped(world: SeedWorld, days: number, deal: Contract, orderId: string) {
  await world.daysAgo(days);
  await record(world, deal.shop, orderId);
  const build = await step.submitBuild(world, deal.shop, orderId);
  await world.daysAgo(days - 1);
  await step.acceptBuild(world, deal.buyer, orderId);
  await releaseMilestone(world.db, deal.buyer.purchaser, { milestoneId: build });
  await world.settle();
  await step.fund(world, deal.buyer, orderId, 'delivery');
  await world.daysAgo(days - 2);
  return step.ship(world, deal.shop, orderId);
}
