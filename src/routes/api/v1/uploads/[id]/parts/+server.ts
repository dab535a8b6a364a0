import { json } from '@sveltejs/kit';
import { uploadParts, uploadPartSlots } from '$lib/schemas/api/files.ts';
import { database } from '$lib/server/db/index.ts';
import { signUploadParts } from '$lib/server/files/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const input = parseInput(uploadParts, await readJson(event));
  return json(uploadPartSlots.parse(await signUploadParts(database(), actor, event.params.id ?? '', input)));
});
