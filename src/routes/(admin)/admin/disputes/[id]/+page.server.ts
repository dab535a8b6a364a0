import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { decisionForm } from '$lib/schemas/forms/order.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { decideAppeal, decideDispute } from '$lib/server/disputes/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { viewDispute } from '$lib/server/workflows/view-dispute.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewDispute(database(), actorOf(event), event.params.id);
    if (!view.admin) throw new AppError('not-found');
    return { view };
  });

function decide(name: string, work: typeof decideDispute) {
  return formAction(name, async (form, event: RequestEvent) => {
    requireFreshSession(event.locals.session);
    const { version, ...input } = parseInput(decisionForm, Object.fromEntries(form));
    await work(database(), actorOf(event), {
      disputeId: event.params.id,
      ...input,
      ...(version ? { version } : {}),
    });
    redirect(303, `/admin/disputes/${event.params.id}`);
  });
}

export const actions: Actions = {
  decide: decide('decide', decideDispute),
  appeal: decide('appeal', decideAppeal),
};
