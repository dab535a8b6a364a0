import { json } from '@sveltejs/kit';
import { openApiDocument } from '$lib/schemas/api/openapi.ts';
import { config } from '$lib/server/config/index.ts';
import type { RequestHandler } from './$types';

let document: Record<string, unknown> | undefined;

export const GET: RequestHandler = () => {
  document ??= openApiDocument(config().origin, 'v1');
  return json(document, { headers: { 'cache-control': 'public, max-age=300' } });
};
