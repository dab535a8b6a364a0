import { timeZoneOptions } from '$lib/domain/time-zones.ts';
import { createCompanyForm } from '$lib/schemas/forms/company.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { createCompany } from '$lib/server/companies/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(() => {
    const actor = actorOf(event);
    return Promise.resolve({
      commandId: newId(),
      zones: timeZoneOptions(),
      timeZone: actor.timeZone,
      emailVerified: actor.emailVerified,
    });
  });

export const actions: Actions = {
  default: formAction('company', async (form, event) => {
    const actor = actorOf(event);
    const input = parseInput(createCompanyForm, Object.fromEntries(form));
    const id = await createCompany(database(), actor, input);
    redirect(303, `/companies/${id}`);
  }),
};
