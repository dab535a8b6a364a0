import { ownPath } from '$lib/domain/own-path.ts';
import { passwordConfirmForm } from '$lib/schemas/forms/people.ts';
import { confirmPassword, signInContext } from '$lib/server/auth/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

/** Where steps that need a fresh sign-in send people; they come back to where they were. */
export const load: PageServerLoad = (event) =>
  loading(() => {
    const { email } = actorOf(event);
    return Promise.resolve({ email, next: ownPath(event.url.searchParams.get('next'), '/desk') });
  });

export const actions: Actions = {
  default: formAction('confirm', async (form, event) => {
    const actor = actorOf(event);
    const { currentPassword } = parseInput(passwordConfirmForm, Object.fromEntries(form));
    await confirmPassword(signInContext(event), actor, event.locals.sessionId ?? '', currentPassword);
    redirect(303, ownPath(event.url.searchParams.get('next'), '/desk'));
  }),
};
