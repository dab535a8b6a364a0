import { limitChecks, runSweep } from '$lib/server/checks/index.ts';
import { database } from '$lib/server/db/index.ts';
import { endpoint, parseInput, readJson } from '$lib/server/http/index.ts';
import { impedanceRequestSchema } from '$lib/schemas/api/impedance.ts';
import type { RequestHandler } from './$types';

/** Inductance and resistance of a coil, bare and with a part, for anyone. */
export const POST: RequestHandler = endpoint(async (event) => {
  const { actor, address } = event.locals;
  await limitChecks(database(), actor ? { userId: actor.userId } : { address });
  const sweep = parseInput(impedanceRequestSchema, await readJson(event));
  return new Response(await runSweep(sweep), {
    headers: { 'content-type': 'application/json', 'cache-control': 'no-store' },
  });
});
