import { ownPath } from '$lib/domain/own-path.ts';
import { secondFactorForm } from '$lib/schemas/forms/people.ts';
import { answerSecondFactor, signInContext } from '$lib/server/auth/index.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = ({ locals, url }) => {
  const next = ownPath(url.searchParams.get('next'), '/desk');
  if (locals.actor) redirect(303, next);
  return { next, backup: url.searchParams.get('with') === 'backup' };
};

export const actions: Actions = {
  default: formAction('second-factor', async (form, event) => {
    const input = parseInput(secondFactorForm, Object.fromEntries(form));
    await answerSecondFactor(signInContext(event), { ...input, backup: input.kind === 'backup' });
    redirect(303, ownPath(event.url.searchParams.get('next'), '/desk'));
  }),
};
