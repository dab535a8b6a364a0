import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { verificationQueue } from '$lib/server/verification/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const which = event.url.searchParams.get('show') === 'decided' ? 'decided' : 'waiting';
    return { which, cases: await verificationQueue(database(), actor, which), timeZone: actor.timeZone };
  });
