import { database } from '$lib/server/db/index.ts';
import { frameFor } from '$lib/server/workflows/frame.ts';
import { redirect } from '@sveltejs/kit';
import type { LayoutServerLoad } from './$types.ts';

/** Comfort, not the guard: every page and action asks for its actor itself. */
export const load: LayoutServerLoad = ({ locals, url }) => {
  if (!locals.actor) redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`);
  return frameFor(database(), locals.actor);
};
