import { timeZoneOptions } from '$lib/domain/time-zones.ts';
import { profileForm } from '$lib/schemas/forms/people.ts';
import { updateProfile } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(() => {
    const { name, email, timeZone, unitSet } = actorOf(event);
    return Promise.resolve({ profile: { name, email, timeZone, unitSet }, zones: timeZoneOptions() });
  });

export const actions: Actions = {
  profile: formAction('profile', async (form, event) => {
    const actor = actorOf(event);
    const input = parseInput(profileForm, Object.fromEntries(form));
    await updateProfile(database(), actor, input);
    // Pages render times by this; the browser's own zone is not asked.
    event.cookies.set('zone', input.timeZone, {
      path: '/',
      sameSite: 'lax',
      maxAge: 31_536_000,
      httpOnly: false,
    });
    return { done: 'profile', words: 'Your account was saved.' };
  }),
};
