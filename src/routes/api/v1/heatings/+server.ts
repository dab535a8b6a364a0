import { json } from '@sveltejs/kit';
import { askHeating } from '$lib/server/checks/index.ts';
import { database } from '$lib/server/db/index.ts';
import { endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { heatingRequestSchema } from '$lib/schemas/api/heating.ts';
import type { RequestHandler } from './$types';

/** Begins a heating run as a job. */
export const POST: RequestHandler = endpoint(async (event) => {
  const { actor, address } = event.locals;
  const input = parseInput(heatingRequestSchema, await readJson(event));
  const made = await askHeating(database(), actor ? { userId: actor.userId } : { address }, input);
  return json(made, { status: 202, headers: { location: `/api/v1/heatings/${made.id}` } });
});
