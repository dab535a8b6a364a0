import { can } from '$lib/domain/policy.ts';
import { database } from '$lib/server/db/index.ts';
import { frameFor } from '$lib/server/workflows/frame.ts';
import { error, redirect } from '@sveltejs/kit';
import type { LayoutServerLoad } from './$types.ts';

/** Comfort, not the guard: every page and action of it asks the policy itself. */
export const load: LayoutServerLoad = ({ locals, url }) => {
  if (!locals.actor) redirect(303, `/sign-in?next=${encodeURIComponent(url.pathname + url.search)}`);
  if (!can(locals.actor, 'admin.view'))
    error(404, { message: 'There is nothing here, or it is not yours to see.' });
  return frameFor(database(), locals.actor);
};
