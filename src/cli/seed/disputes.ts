import { desc, eq } from 'drizzle-orm';
import type { Actor } from '../../lib/domain/actor.ts';
import { dispute } from '../../lib/server/db/schema/disputes.ts';
import { addStatement, decideDispute, openDispute as open } from '../../lib/server/disputes/index.ts';
import { milestonesOf } from '../../lib/server/orders/index.ts';
import type { Buyer, Shop } from './cast.ts';
import { record } from './records.ts';
import type { SeedWorld } from './world.ts';

interface Case {
  buyer: Buyer;
  shop: Shop;
  orderId: string;
}

async function latestDispute(world: SeedWorld, milestoneId: string): Promise<string> {
  const [row] = await world.db
    .select({ id: dispute.id })
    .from(dispute)
    .where(eq(dispute.milestoneId, milestoneId))
    .orderBy(desc(dispute.id))
    .limit(1);
  if (!row) throw new Error('the dispute was not opened');
  return row.id;
}

/** A dispute that waits for its answer: the frequency on the machine is off. */
export async function openDispute(world: SeedWorld, { buyer, orderId }: Case): Promise<void> {
  const delivery = (await milestonesOf(world.db, orderId)).find((row) => row.kind === 'delivery');
  if (!delivery) throw new Error('no delivery milestone');
  await open(world.db, buyer.purchaser, {
    milestoneId: delivery.id,
    reason: 'not-as-specified',
    complaintAbout: 'Lead spacing at the contact face',
    pieceId: null,
    amountClaimed: Math.floor(delivery.amount / 2),
    text: 'The leads stand 2 mm wider than the connection plate; we had to bend them in our shop before the coil could be mounted.',
    fileIds: [],
    commandId: world.command(),
  });
  await world.settle();
}

/** A dispute of the past: measured outside its band, decided with a split, final after five days. */
export async function decidedDispute(
  world: SeedWorld,
  { buyer, shop, orderId, admin, days }: Case & { admin: Actor; days: number },
): Promise<void> {
  await world.daysAgo(days);
  await record(world, shop, orderId, { miss: true });
  const build = (await milestonesOf(world.db, orderId)).find((row) => row.kind === 'build');
  if (!build) throw new Error('no build milestone');
  await world.daysAgo(days - 2);
  await open(world.db, buyer.purchaser, {
    milestoneId: build.id,
    reason: 'not-as-specified',
    complaintAbout: 'Inductance of the coil alone',
    pieceId: null,
    amountClaimed: build.amount,
    text: 'The inductance is above its band. On our bank the tank falls out of the supply’s range; we cannot use the coil as it is.',
    fileIds: [],
    commandId: world.command(),
  });
  await world.settle();
  const disputeId = await latestDispute(world, build.id);
  await world.daysAgo(days - 5);
  await addStatement(world.db, shop.owner, {
    disputeId,
    text: 'The band was missed by a little. With one unit of the bank more the frequency is in range again; we offered to rewind the last turn.',
    fileIds: [],
    commandId: world.command(),
  });
  await world.settle();
  await world.daysAgo(days - 9);
  const refund = Math.floor(build.amount * 0.6);
  await decideDispute(world.db, admin, {
    disputeId,
    release: build.amount - refund,
    refund,
    goods: 'The coil stays with the fabricator, who may rewind and sell it.',
    otherMilestones: 'The delivery milestone is not funded and is cancelled.',
    freightPaidBy: 'none',
    reason:
      'The measured value lies outside the accepted band, which the fabricator does not contest. The copper and the work up to winding keep part of their value for the fabricator.',
  });
  await world.daysAgo(days - 15);
  await world.settle();
}
