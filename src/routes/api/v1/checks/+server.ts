import { limitChecks, runCheck } from '$lib/server/checks/index.ts';
import { database } from '$lib/server/db/index.ts';
import { endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { checkRequestSchema } from '$lib/schemas/api/check.ts';
import type { RequestHandler } from './$types';

/** The check, for anyone. Nothing is kept. */
export const POST: RequestHandler = endpoint(async (event) => {
  const { actor, address } = event.locals;
  await limitChecks(database(), actor ? { userId: actor.userId } : { address });
  const { requirement, setting } = parseInput(checkRequestSchema, await readJson(event));
  const run = await runCheck(requirement, setting ?? 'default');
  return new Response(run.body, {
    headers: { 'content-type': 'application/json', 'cache-control': 'no-store' },
  });
});
