import { byHandInput, jobFilter, queryOf } from '$lib/schemas/forms/admin.ts';
import { handleJob, listJobs } from '$lib/server/admin/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const filter = jobFilter.parse(queryOf(event.url.searchParams, ['state', 'after']));
    return { ...(await listJobs(database(), actor, filter)), filter, timeZone: actor.timeZone };
  });

export const actions: Actions = {
  hand: formAction('hand', async (form, event: RequestEvent) => {
    const { id, event: act } = parseInput(byHandInput, Object.fromEntries(form));
    await handleJob(database(), actorOf(event), id, act);
    return { done: 'hand', words: act === 'retry' ? 'The job is queued again.' : 'The job is parked.' };
  }),
};
