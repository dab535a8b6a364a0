import { signInContext, signOut } from '$lib/server/auth/index.ts';
import { formAction } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

/** Following the address by hand changes nothing; signing out is a POST. */
export const load: PageServerLoad = ({ locals }) => ({ signedIn: locals.actor !== null });

export const actions: Actions = {
  default: formAction('sign-out', async (_form, event) => {
    await signOut(signInContext(event));
    redirect(303, '/sign-in?out=1');
  }),
};
