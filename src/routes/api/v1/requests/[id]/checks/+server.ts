import { z } from 'zod';
import { database } from '$lib/server/db/index.ts';
import { actorOf, endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { checkDraft } from '$lib/server/requests/index.ts';
import type { RequestHandler } from './$types';

const schema = z.object({ version: z.int().min(1) });

/** The server's check of exactly this version of the draft, stored. */
export const POST: RequestHandler = endpoint(async (event) => {
  const actor = actorOf(event);
  const { version } = parseInput(schema, await readJson(event));
  const { body, ...check } = await checkDraft(database(), actor, { requestId: event.params.id, version });
  // The stored result is sent as its own bytes, not parsed and written again.
  return new Response(`{"check":${JSON.stringify(check)},"result":${body}}`, {
    headers: { 'content-type': 'application/json', 'cache-control': 'no-store' },
  });
});
