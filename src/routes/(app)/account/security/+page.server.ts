import { addressChangeForm, passwordChangeForm, passwordConfirmForm } from '$lib/schemas/forms/people.ts';
import {
  askAddressChange,
  changePassword,
  endOtherSessions,
  endSession,
  listSessions,
  signInContext,
  stopTwoFactor,
} from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      email: actor.email,
      timeZone: actor.timeZone,
      twoFactor: actor.twoFactor ?? false,
      changed: event.url.searchParams.has('changed'),
      sessions: await listSessions(database(), actor, event.locals.sessionId),
    };
  });

export const actions: Actions = {
  password: formAction('password', async (form, event) => {
    const actor = actorOf(event);
    await changePassword(
      signInContext(event),
      actor,
      parseInput(passwordChangeForm, Object.fromEntries(form)),
    );
    return { done: 'password', words: 'Your password was changed. Your other sessions have ended.' };
  }),
  address: formAction('address', async (form, event) => {
    const actor = actorOf(event);
    const input = parseInput(addressChangeForm, Object.fromEntries(form));
    await askAddressChange(signInContext(event), actor, input);
    return {
      done: 'address',
      words: `We have written to ${input.email}. The link there makes it your address.`,
    };
  }),
  'end-session': formAction('end-session', async (form, event) => {
    const actor = actorOf(event);
    const id = form.get('sessionId');
    await endSession(database(), actor, typeof id === 'string' ? id : '');
    return { done: 'end-session', words: 'The session has ended.' };
  }),
  'end-others': formAction('end-others', async (_form, event) => {
    const actor = actorOf(event);
    const count = await endOtherSessions(database(), actor, event.locals.sessionId ?? '');
    return {
      done: 'end-others',
      words: count === 1 ? 'One session has ended.' : `${count} sessions have ended.`,
    };
  }),
  'stop-two-factor': formAction('stop-two-factor', async (form, event) => {
    const actor = actorOf(event);
    const { currentPassword } = parseInput(passwordConfirmForm, Object.fromEntries(form));
    await stopTwoFactor(signInContext(event), actor, currentPassword);
    return { done: 'stop-two-factor', words: 'Two-factor sign-in is off.' };
  }),
};
