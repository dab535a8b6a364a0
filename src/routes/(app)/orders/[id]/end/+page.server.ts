import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { amountField, endForm } from '$lib/schemas/forms/order.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { proposeEnd } from '$lib/server/workflows/end-proposals.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewOrder(database(), actorOf(event), event.params.id);
    return {
      order: view.order,
      side: view.side,
      mayEnd: view.rights.end && !['done', 'ended'].includes(view.order.state),
      held: view.milestones
        .filter((m) => m.money === 'held')
        .map((m) => ({ id: m.id, kind: m.kind, held: m.books.held, work: m.work })),
      unfunded: view.milestones
        .filter((m) => m.money === 'unfunded' || m.money === 'paying')
        .map((m) => m.kind),
      open: view.proposals.find((row) => row.state === 'open' && !row.own) ?? null,
      commandId: newId(),
    };
  });

export const actions: Actions = {
  default: formAction('end', async (form, event: RequestEvent) => {
    const view = await viewOrder(database(), actorOf(event), event.params.id);
    const input = parseInput(endForm, Object.fromEntries(form));
    const fields: Record<string, string> = {};
    const amount = (name: string) => {
      const read = amountField().safeParse(form.get(name) ?? '');
      if (!read.success) fields[name] = read.error.issues[0]?.message ?? 'Enter an amount.';
      return read.success ? read.data : 0;
    };
    const parts = view.milestones
      .filter((m) => m.money === 'held')
      .map((m) => ({
        milestoneId: m.id,
        release: amount(`release-${m.id}`),
        refund: amount(`refund-${m.id}`),
      }));
    if (Object.keys(fields).length > 0) throw new AppError('invalid-input', { fields });
    await proposeEnd(database(), actorOf(event), { orderId: event.params.id, parts, ...input });
    redirect(303, `/orders/${event.params.id}#end`);
  }),
};
