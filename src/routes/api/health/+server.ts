import { isReady } from '$lib/server/http/health.ts';
import { json } from '@sveltejs/kit';
import type { RequestHandler } from './$types';

/** Alive by answering at all; ready once the database answers in the expected version. Details are for admins. */
export const GET: RequestHandler = async () => {
  const ready = await isReady();
  return json(
    { alive: true, ready },
    { status: ready ? 200 : 503, headers: { 'cache-control': 'no-store' } },
  );
};
