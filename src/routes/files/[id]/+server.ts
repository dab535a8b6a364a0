import { error } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { database } from '$lib/server/db/index.ts';
import { fileLink } from '$lib/server/files/index.ts';
import { actorOf } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

/** Asks the policy, then sends the browser to a link that is good for a minute. */
export const GET: RequestHandler = async (event) => {
  try {
    const { url } = await fileLink(database(), actorOf(event), event.params.id);
    return new Response(null, {
      status: 303,
      headers: { location: url, 'cache-control': 'no-store', 'referrer-policy': 'no-referrer' },
    });
  } catch (problem) {
    if (problem instanceof AppError) error(problem.status, { message: problem.message, code: problem.code });
    throw problem;
  }
};
