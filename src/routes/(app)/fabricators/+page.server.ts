import { directoryFilter } from '$lib/schemas/forms/verification.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { listFabricators } from '$lib/server/verification/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const filter = directoryFilter.parse({
      q: event.url.searchParams.get('q') ?? '',
      shape: event.url.searchParams.get('shape'),
      after: event.url.searchParams.get('after'),
    });
    return {
      ...(await listFabricators(database(), actor, filter)),
      filter,
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
    };
  });
