import { emailField, emailForm } from '$lib/schemas/forms/people.ts';
import { askPasswordReset, signInContext } from '$lib/server/auth/index.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = ({ url }) => {
  const sent = emailField.safeParse(url.searchParams.get('sent') ?? '');
  return { sent: sent.success ? sent.data : '' };
};

export const actions: Actions = {
  default: formAction('forgot', async (form, event) => {
    const { email } = parseInput(emailForm, Object.fromEntries(form));
    await askPasswordReset(signInContext(event), { email });
    redirect(303, `/forgot?sent=${encodeURIComponent(email)}`);
  }),
};
