import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { statementOf } from '$lib/server/money/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return { statement: await statementOf(database(), actor, event.params.id), zone: actor.timeZone };
  });
