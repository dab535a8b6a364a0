import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { fabricatorPage } from '$lib/server/verification/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      ...(await fabricatorPage(database(), actor, event.params.id)),
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
    };
  });
