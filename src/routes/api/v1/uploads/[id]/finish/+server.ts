import { json } from '@sveltejs/kit';
import { uploadFinish, uploadState } from '$lib/schemas/api/files.ts';
import { database } from '$lib/server/db/index.ts';
import { finishUpload } from '$lib/server/files/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const input = parseInput(uploadFinish, await readJson(event));
  return json(uploadState.parse(await finishUpload(database(), actor, event.params.id ?? '', input)));
});
