import { ownPath } from '$lib/domain/own-path.ts';
import { emailField, signUpForm } from '$lib/schemas/forms/people.ts';
import { signInContext, signUp } from '$lib/server/auth/index.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = ({ locals, url }) => {
  const next = ownPath(url.searchParams.get('next'), '/desk');
  if (locals.actor) redirect(303, next);
  const invited = emailField.safeParse(url.searchParams.get('email') ?? '');
  return { next, email: invited.success ? invited.data : '' };
};

export const actions: Actions = {
  default: formAction('sign-up', async (form, event) => {
    const input = parseInput(signUpForm, Object.fromEntries(form));
    await signUp(signInContext(event), input);
    redirect(303, `/verify?sent=${encodeURIComponent(input.email)}`);
  }),
};
