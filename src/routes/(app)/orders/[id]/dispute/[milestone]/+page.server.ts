import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { fileIdsForm, openDisputeForm } from '$lib/schemas/forms/order.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { openDispute } from '$lib/server/disputes/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewOrder(database(), actorOf(event), event.params.id);
    const milestone = view.milestones.find((m) => m.id === event.params.milestone);
    if (!milestone) throw new AppError('not-found');
    return {
      order: view.order,
      side: view.side,
      milestone,
      pieces: view.pieces.map(({ id, serial }) => ({ id, serial })),
      lines: view.specification.acceptance.map(({ id, label }) => ({ id, label })),
      commandId: newId(),
    };
  });

export const actions: Actions = {
  default: formAction('dispute', async (form, event: RequestEvent) => {
    const input = parseInput(openDisputeForm, Object.fromEntries(form));
    const { disputeId } = await openDispute(database(), actorOf(event), {
      ...input,
      milestoneId: event.params.milestone ?? '',
      fileIds: parseInput(fileIdsForm, form.getAll('files')),
    });
    redirect(303, `/orders/${event.params.id}/disputes/${disputeId}`);
  }),
};
