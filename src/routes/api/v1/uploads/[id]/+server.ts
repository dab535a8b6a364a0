import { json } from '@sveltejs/kit';
import { uploadState as output } from '$lib/schemas/api/files.ts';
import { database } from '$lib/server/db/index.ts';
import { cancelUpload, uploadState } from '$lib/server/files/index.ts';
import { actorOf, endpoint } from '$lib/server/http/index.ts';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = endpoint(async (event) =>
  json(output.parse(await uploadState(database(), actorOf(event), event.params.id ?? ''))),
);

export const DELETE: RequestHandler = endpoint(async (event) => {
  await cancelUpload(database(), actorOf(event), event.params.id ?? '');
  return new Response(null, { status: 204 });
});
