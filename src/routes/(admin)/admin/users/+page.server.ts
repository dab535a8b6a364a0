import { queryOf, userFilter } from '$lib/schemas/forms/admin.ts';
import { listUsers } from '$lib/server/admin/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const filter = userFilter.parse(queryOf(event.url.searchParams, ['q', 'after']));
    return { ...(await listUsers(database(), actor, filter)), filter, timeZone: actor.timeZone };
  });
