import { dev } from '$app/environment';
import { env } from '$env/dynamic/private';
import { error } from '@sveltejs/kit';
import type { PageServerLoad } from './$types';

/** A gallery for those who build the screens; a production installation has no such page. */
export const load: PageServerLoad = () => {
  if (!dev && (env.COILYARD_MODE || 'demo') === 'production') error(404, 'Not Found');
};
