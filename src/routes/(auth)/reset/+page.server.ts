import { resetForm } from '$lib/schemas/forms/people.ts';
import { resetPassword, signInContext } from '$lib/server/auth/index.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = ({ url }) => ({ token: url.searchParams.get('token') ?? '' });

export const actions: Actions = {
  default: formAction('reset', async (form, event) => {
    const input = parseInput(resetForm, {
      ...Object.fromEntries(form),
      token: event.url.searchParams.get('token') ?? '',
    });
    await resetPassword(signInContext(event), input);
    redirect(303, '/sign-in?reset=1');
  }),
};
