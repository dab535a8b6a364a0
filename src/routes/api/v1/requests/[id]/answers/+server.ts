import { json } from '@sveltejs/kit';
import { answerFindingSchema } from '$lib/schemas/api/draft.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { answerFinding } from '$lib/server/requests/index.ts';
import type { RequestHandler } from './$types';

/** Acknowledges a caution or carries a blocker; answers all answers so far. */
export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const input = parseInput(answerFindingSchema, await readJson(event));
  return json({ answers: await answerFinding(database(), actor, { requestId: event.params.id, ...input }) });
});
