import { redirect } from '@sveltejs/kit';
import { myBids } from '$lib/server/bids/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = async (event) => {
  if (!event.locals.actor) redirect(303, `/sign-in?next=${encodeURIComponent(event.url.pathname)}`);
  return loading(async () => ({
    bids: await myBids(database(), actorOf(event)),
    timeZone: actorOf(event).timeZone,
  }));
};
