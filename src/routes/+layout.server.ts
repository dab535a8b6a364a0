import { sessionCookie } from '$lib/server/auth/index.ts';
import { config } from '$lib/server/config/index.ts';
import type { LayoutServerLoad } from './$types.ts';

/** The cookie alone: public pages look no session up, they only show the way to the desk. */
export const load: LayoutServerLoad = ({ cookies, locals }) => ({
  mode: config().mode,
  hasSession: cookies.get(sessionCookie) !== undefined,
  requestId: locals.requestId,
});
