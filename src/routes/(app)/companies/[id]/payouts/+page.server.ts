import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { openOnboarding, refreshPayoutAccount, viewPayoutAccount } from '$lib/server/money/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

/** Only reads, also for those who come back from the payment service: what it says arrives by webhook. */
export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const account = await viewPayoutAccount(database(), actor, event.params.id);
    return {
      account,
      companyId: event.params.id,
      companyName: actor.memberships.find((m) => m.companyId === event.params.id)?.companyName ?? '',
      zone: actor.timeZone,
      returned: event.url.searchParams.has('returned'),
      again: event.url.searchParams.has('again'),
    };
  });

const onboardForm = z.object({
  country: z
    .string({ error: 'Choose the country of the company.' })
    .trim()
    .toUpperCase()
    .regex(/^[A-Z]{2}$/, 'Choose the country of the company.'),
});

export const actions: Actions = {
  onboard: formAction('onboard', async (form, event: RequestEvent) => {
    requireFreshSession(event.locals.session);
    const { country } = parseInput(onboardForm, Object.fromEntries(form));
    const { url } = await openOnboarding(database(), actorOf(event), { companyId: event.params.id, country });
    redirect(303, url);
  }),
  refresh: formAction('refresh', async (_form, event: RequestEvent) => {
    await refreshPayoutAccount(database(), actorOf(event), { companyId: event.params.id });
    redirect(303, `/companies/${event.params.id}/payouts`);
  }),
};
