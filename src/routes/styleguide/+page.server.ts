import { dev } from '$app/environment';
import { config } from '$lib/server/config/index.ts';
import { error } from '@sveltejs/kit';
import type { PageServerLoad } from './$types';

/** A gallery for those who build the screens; a production installation has no such page. */
export const load: PageServerLoad = () => {
  if (!dev && config().mode === 'production') error(404, 'Not Found');
};
