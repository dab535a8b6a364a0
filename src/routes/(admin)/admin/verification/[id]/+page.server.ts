import { AppError } from '$lib/domain/errors.ts';
import { listsOf, refuseInput, verifyInput } from '$lib/schemas/forms/verification.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, fieldMessages, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import {
  refuseFabricator,
  revokeVerification,
  verificationCaseFor,
  verifyFabricator,
} from '$lib/server/verification/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const found = await verificationCaseFor(database(), actor, event.params.id);
    return { ...found, unitSet: actor.unitSet, timeZone: actor.timeZone };
  });

export const actions: Actions = {
  verify: formAction('verify', async (form, event: RequestEvent) => {
    const parsed = verifyInput.safeParse(listsOf(form, ['items']));
    if (!parsed.success) {
      throw new AppError('invalid-input', {
        fields: fieldMessages(parsed.error),
        data: { items: form.getAll('items').map(String) },
      });
    }
    await verifyFabricator(database(), actorOf(event), event.params.id, parsed.data);
    return { done: 'verify', words: 'Verified; the company has been told.' };
  }),
  refuse: formAction('refuse', async (form, event: RequestEvent) => {
    const input = parseInput(refuseInput, Object.fromEntries(form));
    await refuseFabricator(database(), actorOf(event), event.params.id, input);
    return { done: 'refuse', words: 'Refused; the company has been told the reasons.' };
  }),
  revoke: formAction('revoke', async (form, event: RequestEvent) => {
    const input = parseInput(refuseInput, Object.fromEntries(form));
    await revokeVerification(database(), actorOf(event), event.params.id, input);
    return { done: 'revoke', words: 'The verification is ended; the company has been told the reasons.' };
  }),
};
