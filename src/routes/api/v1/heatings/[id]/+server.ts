import { json } from '@sveltejs/kit';
import { cancelHeating, heatingState } from '$lib/server/checks/index.ts';
import { database } from '$lib/server/db/index.ts';
import { endpoint } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = endpoint(async (event) => {
  const state = await heatingState(database(), event.locals.actor?.userId ?? null, event.params.id);
  return json(state, { headers: { 'cache-control': 'no-store' } });
});

export const DELETE: RequestHandler = endpoint(async (event) => {
  await cancelHeating(database(), event.locals.actor?.userId ?? null, event.params.id);
  return new Response(null, { status: 204 });
});
