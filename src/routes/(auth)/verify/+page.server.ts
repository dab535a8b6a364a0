import { emailForm, emailField } from '$lib/schemas/forms/people.ts';
import { sendVerificationAgain, signInContext, verifyAddress } from '$lib/server/auth/index.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

/** Opening the link changes nothing (mail programs open links too); the button on the page does. */
export const load: PageServerLoad = ({ url }) => {
  const sent = emailField.safeParse(url.searchParams.get('sent') ?? '');
  return { token: url.searchParams.get('token') ?? '', sent: sent.success ? sent.data : '' };
};

export const actions: Actions = {
  confirm: formAction('confirm', async (form, event) => {
    const token = form.get('token');
    const outcome = await verifyAddress(signInContext(event), typeof token === 'string' ? token : '');
    redirect(
      303,
      outcome === 'changed' && event.locals.actor ? '/account/security?changed=1' : '/sign-in?verified=1',
    );
  }),
  again: formAction('again', async (form, event) => {
    const { email } = parseInput(emailForm, Object.fromEntries(form));
    await sendVerificationAgain(signInContext(event), { email });
    redirect(303, `/verify?sent=${encodeURIComponent(email)}`);
  }),
};
