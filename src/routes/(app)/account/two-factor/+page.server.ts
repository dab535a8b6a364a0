import { codeForm, passwordConfirmForm } from '$lib/schemas/forms/people.ts';
import { confirmTwoFactor, pendingTwoFactor, signInContext, startTwoFactor } from '$lib/server/auth/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import QRCode from 'qrcode';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const pending = actor.twoFactor ? null : await pendingTwoFactor(signInContext(event), actor);
    return {
      on: actor.twoFactor ?? false,
      pending: pending && {
        secret: pending.secret.replace(/(.{4})/g, '$1 ').trim(),
        backupCodes: pending.backupCodes,
        // Drawn here, so that the secret goes to no other service; dark on light in both themes, as readers need.
        picture: await QRCode.toDataURL(pending.uri, { margin: 2, scale: 5 }),
      },
    };
  });

export const actions: Actions = {
  start: formAction('start', async (form, event) => {
    const actor = actorOf(event);
    const { currentPassword } = parseInput(passwordConfirmForm, Object.fromEntries(form));
    await startTwoFactor(signInContext(event), actor, currentPassword);
    redirect(303, '/account/two-factor');
  }),
  confirm: formAction('confirm', async (form, event) => {
    const actor = actorOf(event);
    const { code } = parseInput(codeForm, Object.fromEntries(form));
    await confirmTwoFactor(signInContext(event), actor, code);
    redirect(303, '/account/two-factor');
  }),
};
