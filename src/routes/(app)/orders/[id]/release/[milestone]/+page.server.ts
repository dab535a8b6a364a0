import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { milestoneForm } from '$lib/schemas/forms/order.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { releaseMilestone } from '$lib/server/money/index.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewOrder(database(), actorOf(event), event.params.id);
    const milestone = view.milestones.find((m) => m.id === event.params.milestone);
    if (!milestone) throw new AppError('not-found');
    return {
      order: view.order,
      zone: view.zone,
      milestone,
      held: milestone.books.held,
      payoutReady: view.payoutReady,
      drawing: view.drawings.find((row) => row.state === 'approved') ?? null,
      pieces: view.pieces.map(({ serial, state }) => ({ serial, state })),
      shipment: view.shipments.at(-1) ?? null,
    };
  });

export const actions: Actions = {
  default: formAction('release', async (form, event: RequestEvent) => {
    requireFreshSession(event.locals.session);
    const { milestoneId, version } = parseInput(milestoneForm, Object.fromEntries(form));
    if (milestoneId !== event.params.milestone) throw new AppError('not-found');
    await releaseMilestone(database(), actorOf(event), { milestoneId, ...(version ? { version } : {}) });
    redirect(303, `/orders/${event.params.id}#milestone-${milestoneId}`);
  }),
};
