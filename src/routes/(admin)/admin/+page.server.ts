import { adminOverview } from '$lib/server/admin/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return { ...(await adminOverview(database(), actor)), timeZone: actor.timeZone };
  });
