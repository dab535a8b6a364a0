import {
  foundBuyer,
  foundShop,
  limitAwards,
  makeAdmin,
  onboardPayouts,
  verifyShop,
  type Shop,
} from './cast.ts';
import { pinRequirement, ringRequirement, shaftRequirement, tipRequirement } from './requirements.ts';
import type { SeedWorld } from './world.ts';

/** The same people with what is true of them now: the shop is verified. */
async function refreshed(world: SeedWorld, shop: Shop): Promise<Shop> {
  return {
    id: shop.id,
    owner: await world.actor(shop.owner.userId),
    estimator: await world.actor(shop.estimator.userId),
    builder: await world.actor(shop.builder.userId),
  };
}

/** The companies, people, machines and payout accounts of the demo. */
export async function setTheScene(world: SeedWorld) {
  await world.daysAgo(120);
  // The platform pays the processing fees out of its own balance; without one, full refunds would wait.
  for (const currency of ['eur', 'usd', 'gbp']) await world.control('balance', { amount: 200_000, currency });
  const admin = await makeAdmin(world, 'Admin', 'admin@coilyard.example');
  const secondAdmin = await makeAdmin(world, 'Second admin', 'second-admin@coilyard.example');
  const millrace = await foundBuyer(world, {
    name: 'Millrace Driveline',
    short: 'Millrace',
    currency: 'EUR',
    timeZone: 'Europe/Berlin',
    about: 'Hardens pins and shafts for drivelines.',
    taxNumber: '',
    address: { line1: 'Wehrgasse 4', postalCode: '58095', city: 'Hagen', country: 'DE' },
  });
  const kestrelmoor = await foundBuyer(world, {
    name: 'Kestrelmoor Brazing',
    short: 'Kestrelmoor',
    currency: 'GBP',
    timeZone: 'Europe/London',
    about: 'Brazes carbide tips.',
    taxNumber: '',
    address: { line1: '9 Moor Lane', postalCode: 'S1 2AB', city: 'Sheffield', country: 'GB' },
  });
  const fennick = await foundBuyer(world, {
    name: 'Fennick Shrink & Fit',
    short: 'Fennick',
    currency: 'USD',
    timeZone: 'America/Chicago',
    about: 'Heats bearing seats and rings for shrink fits.',
    taxNumber: '',
    address: { line1: '210 Harbor Street', postalCode: '53202', city: 'Milwaukee', country: 'US' },
    unitSet: 'inch',
  });
  await limitAwards(world, millrace, 600_000);

  const shopFacts = { timeZone: 'Europe/Berlin', currency: 'EUR' as const, taxNumber: '' };
  const copperfold = await foundShop(world, {
    ...shopFacts,
    name: 'Copperfold Works',
    short: 'Copperfold',
    about: 'Work coils from 4 to 22 mm tube.',
    statement: 'Helical and pancake coils with fixtures, measured and recorded before they leave the shop.',
    address: { line1: 'Rohrweg 11', postalCode: '42103', city: 'Wuppertal', country: 'DE' },
    shapes: ['helix', 'conical', 'stepped', 'pancake', 'single-turn', 'bore'],
    work: ['braze-silver', 'machining', 'fixtures', 'repair'],
    tests: ['inductance', 'pressure', 'flow', 'dimensions'],
    tubeMin: '4 mm',
    tubeMax: '22 mm',
  });
  const tallow = await foundShop(world, {
    ...shopFacts,
    name: 'Tallow Bend Shop',
    short: 'Tallow',
    about: 'Small coils, quickly.',
    statement: 'A small shop for coils up to 12 mm tube, with pressure test and inductance record.',
    address: { line1: '3 Foundry Yard', postalCode: 'B1 1AA', city: 'Birmingham', country: 'GB' },
    shapes: ['helix', 'single-turn', 'pancake'],
    work: ['braze-silver', 'braze-phosphorus'],
    tests: ['inductance', 'pressure'],
    tubeMin: '3 mm',
    tubeMax: '13 mm',
  });
  await verifyShop(world, admin, copperfold.caseId);
  await verifyShop(world, admin, tallow.caseId);
  await onboardPayouts(world, copperfold, 'DE');
  await onboardPayouts(world, tallow, 'GB');
  await world.settle();
  return {
    admin,
    secondAdmin,
    millrace,
    kestrelmoor,
    fennick,
    copperfold: await refreshed(world, copperfold),
    tallow: await refreshed(world, tallow),
  };
}

export type Scene = Awaited<ReturnType<typeof setTheScene>> & {
  hardening: string;
  brazing: string;
  shrinking: string;
};

/** What is asked for, by machine and title. */
export const plans = {
  shaft: (scene: Scene, title: string) => ({
    title,
    requirement: shaftRequirement(),
    machineId: scene.hardening,
    currency: 'EUR' as const,
    place: 'Hagen, gate 2',
    budget: '4500',
  }),
  pin: (scene: Scene, title: string) => ({
    title,
    requirement: pinRequirement(),
    machineId: scene.hardening,
    currency: 'EUR' as const,
    place: 'Hagen, gate 2',
    budget: '3000',
  }),
  tip: (scene: Scene, title: string) => ({
    title,
    requirement: tipRequirement(),
    machineId: scene.brazing,
    currency: 'GBP' as const,
    place: 'Sheffield, goods in',
    quantity: 2,
  }),
  ring: (scene: Scene, title: string) => ({
    title,
    requirement: ringRequirement(),
    machineId: scene.shrinking,
    currency: 'USD' as const,
    place: 'Milwaukee, dock 3',
    inspectionDays: 14,
  }),
};
