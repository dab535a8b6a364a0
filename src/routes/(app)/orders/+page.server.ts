import { z } from 'zod';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { listOrders, orderFilters } from '$lib/server/orders/index.ts';
import type { PageServerLoad } from './$types.ts';

const query = z.object({
  show: z.enum(orderFilters).catch('open'),
  after: z.uuid().nullable().catch(null),
});

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const { show, after } = query.parse({
      show: event.url.searchParams.get('show'),
      after: event.url.searchParams.get('after'),
    });
    return {
      ...(await listOrders(database(), actor, { filter: show, after })),
      show,
      zone: actor.timeZone,
    };
  });
