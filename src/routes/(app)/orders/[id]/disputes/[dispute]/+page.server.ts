import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { answerOfferForm, fileIdsForm, offerForm, statementForm } from '$lib/schemas/forms/order.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import {
  addStatement,
  answerOffer,
  appealDispute,
  offerSettlement,
  withdrawDispute,
} from '$lib/server/disputes/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { viewDispute } from '$lib/server/workflows/view-dispute.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const view = await viewDispute(database(), actorOf(event), event.params.dispute);
    if (view.order.id !== event.params.id) throw new AppError('not-found');
    return { view, commandId: newId() };
  });

function act(
  name: string,
  work: (form: FormData, event: RequestEvent, disputeId: string) => Promise<unknown>,
) {
  return formAction(name, async (form, event: RequestEvent) => {
    await work(form, event, event.params.dispute);
    redirect(303, `/orders/${event.params.id}/disputes/${event.params.dispute}`);
  });
}

const fields = (form: FormData) => Object.fromEntries(form);

export const actions: Actions = {
  statement: act('statement', (form, event, disputeId) =>
    addStatement(database(), actorOf(event), {
      disputeId,
      ...parseInput(statementForm, fields(form)),
      fileIds: parseInput(fileIdsForm, form.getAll('files')),
    }),
  ),
  offer: act('offer', (form, event, disputeId) =>
    offerSettlement(database(), actorOf(event), { disputeId, ...parseInput(offerForm, fields(form)) }),
  ),
  answer: act('answer', (form, event) => {
    requireFreshSession(event.locals.session);
    return answerOffer(database(), actorOf(event), parseInput(answerOfferForm, fields(form)));
  }),
  appeal: act('appeal', (form, event, disputeId) =>
    appealDispute(database(), actorOf(event), { disputeId, ...parseInput(statementForm, fields(form)) }),
  ),
  withdraw: act('withdraw', (_form, event, disputeId) =>
    withdrawDispute(database(), actorOf(event), { disputeId }),
  ),
};
