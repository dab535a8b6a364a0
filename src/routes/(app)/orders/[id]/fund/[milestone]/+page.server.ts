import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import { fundMilestone } from '$lib/server/money/index.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewOrder(database(), actorOf(event), event.params.id);
    const milestone = view.milestones.find((m) => m.id === event.params.milestone);
    if (!milestone) throw new AppError('not-found');
    const { order, now, zone } = view;
    return { order, now, zone, milestone, mayFund: milestone.may.fund };
  });

export const actions: Actions = {
  default: formAction('fund', async (_form, event: RequestEvent) => {
    requireFreshSession(event.locals.session);
    const { url } = await fundMilestone(database(), actorOf(event), {
      milestoneId: event.params.milestone ?? '',
    });
    // The hosted page of the payment service; its address comes from the service itself.
    redirect(303, url);
  }),
};
