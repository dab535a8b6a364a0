import { ownPath } from '$lib/domain/own-path.ts';
import { signInForm } from '$lib/schemas/forms/people.ts';
import { signIn, signInContext } from '$lib/server/auth/index.ts';
import { demoSignIns } from '$lib/server/http/demo-sign-ins.ts';
import { formAction, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = ({ locals, url }) => {
  const next = ownPath(url.searchParams.get('next'), '/desk');
  if (locals.actor) redirect(303, next);
  const demo = demoSignIns();
  return {
    next,
    justOut: url.searchParams.has('out'),
    justVerified: url.searchParams.has('verified'),
    justReset: url.searchParams.has('reset'),
    demo,
    // The link “fill in” of a demo sign-in; nothing of it exists outside the demo.
    filled: demo[Number(url.searchParams.get('as') ?? '-1')] ?? null,
  };
};

export const actions: Actions = {
  default: formAction('sign-in', async (form, event) => {
    const input = parseInput(signInForm, Object.fromEntries(form));
    const next = ownPath(event.url.searchParams.get('next'), '/desk');
    const outcome = await signIn(signInContext(event), input);
    redirect(303, outcome === 'second-factor' ? `/two-factor?next=${encodeURIComponent(next)}` : next);
  }),
};
