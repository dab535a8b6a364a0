import { json } from '@sveltejs/kit';
import { saveDraftSchema } from '$lib/schemas/api/draft.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { saveDraft } from '$lib/server/requests/index.ts';
import type { RequestHandler } from './$types';

/** Saves the draft as typed; 409 carries the newer state. */
export const PUT: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const input = parseInput(saveDraftSchema, await readJson(event));
  return json(await saveDraft(database(), actor, { requestId: event.params.id, ...input }));
});
