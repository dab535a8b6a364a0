import { json } from '@sveltejs/kit';
import { uploadSlot, uploadStart } from '$lib/schemas/api/files.ts';
import { database } from '$lib/server/db/index.ts';
import { startUpload } from '$lib/server/files/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const input = parseInput(uploadStart, await readJson(event));
  return json(uploadSlot.parse(await startUpload(database(), actor, input)), { status: 201 });
});
