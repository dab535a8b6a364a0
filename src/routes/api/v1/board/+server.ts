import { json } from '@sveltejs/kit';
import { readBoardFilter } from '$lib/schemas/forms/board-filter.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, endpoint } from '$lib/server/http/index.ts';
import { boardPage } from '$lib/server/search/index.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const { filter } = readBoardFilter(event.url.searchParams, actor.unitSet);
  return json(await boardPage(database(), actor, filter), { headers: { 'cache-control': 'no-store' } });
});
