import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { deskOf } from '$lib/server/workflows/desk.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      desk: await deskOf(database(), actor),
      timeZone: actor.timeZone,
      hasCompany: actor.memberships.length > 0,
      isAdmin: actor.isAdmin,
    };
  });
