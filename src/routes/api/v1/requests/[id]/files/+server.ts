import { z } from 'zod';
import { json } from '@sveltejs/kit';
import { database } from '$lib/server/db/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { attachFile, detachFile, viewDraft } from '$lib/server/requests/index.ts';
import type { RequestHandler } from './$types';

const schema = z.object({ fileId: z.string().min(1).max(40) });

export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const { fileId } = parseInput(schema, await readJson(event));
  await attachFile(database(), actor, { requestId: event.params.id, fileId });
  return json({ files: (await viewDraft(database(), actor, event.params.id)).files });
});

export const DELETE: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const { fileId } = parseInput(schema, await readJson(event));
  await detachFile(database(), actor, { requestId: event.params.id, fileId });
  return json({ files: (await viewDraft(database(), actor, event.params.id)).files });
});
