import { queryOf, trailFilter } from '$lib/schemas/forms/admin.ts';
import { checkAuditTrail, listAuditTrail, trailFilterChoices } from '$lib/server/admin/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const filter = trailFilter.parse(
      queryOf(event.url.searchParams, ['subjectType', 'subjectId', 'companyId', 'after']),
    );
    return {
      ...(await listAuditTrail(database(), actor, filter)),
      choices: await trailFilterChoices(database(), actor),
      filter,
      timeZone: actor.timeZone,
    };
  });

export const actions: Actions = {
  check: formAction('check', async (_form, event: RequestEvent) => ({
    verdict: await checkAuditTrail(database(), actorOf(event)),
  })),
};
