import { accountDetail, navigationFor } from '$lib/features/people/navigation.ts';
import { database } from '$lib/server/db/index.ts';
import { unreadNotifications } from '$lib/server/workflows/desk.ts';
import { redirect } from '@sveltejs/kit';
import type { LayoutServerLoad } from './$types.ts';

/** Comfort, not the guard: every page and action asks for its actor itself. */
export const load: LayoutServerLoad = async ({ locals, url }) => {
  const { actor } = locals;
  if (!actor) redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`);
  return {
    navigation: navigationFor(actor),
    account: { name: actor.name, detail: accountDetail(actor) },
    unread: await unreadNotifications(database(), actor),
    viewer: { timeZone: actor.timeZone, unitSet: actor.unitSet, isAdmin: actor.isAdmin },
  };
};
