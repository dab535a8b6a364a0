import { redirect } from '@sveltejs/kit';
import {
  answerEndForm,
  concedeForm,
  declineForm,
  drawingForm,
  fileIdsForm,
  groundForm,
  judgeDrawingForm,
  milestoneForm,
  proofForm,
  receiptForm,
  remakeForm,
  returnForm,
  shipForm,
  submitForm,
} from '$lib/schemas/forms/order.ts';
import { orderMessageInput } from '$lib/schemas/forms/messages.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { postMessage } from '$lib/server/messages/index.ts';
import {
  acceptSubmission,
  acknowledgeOrder,
  askRemake,
  concedeMiss,
  confirmReceipt,
  enterDeliveryProof,
  judgeDrawing,
  returnSubmission,
  shipOrder,
  submitDrawing,
  submitMilestone,
} from '$lib/server/orders/index.ts';
import { declineOrder, endByRight, suspendOrder } from '$lib/server/workflows/end-order.ts';
import { answerEnd } from '$lib/server/workflows/end-proposals.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => ({
    ...(await viewOrder(database(), actorOf(event), event.params.id)),
    commandId: newId(),
    /** Where the person comes back from; the money itself is told by the webhook only. */
    returned: event.url.searchParams.has('paid')
      ? ('paid' as const)
      : event.url.searchParams.has('payment-left')
        ? ('left' as const)
        : null,
  }));

const fields = (form: FormData) => Object.fromEntries(form);

/** One act, then back to its place in the room. */
function act(
  name: string,
  anchor: string | ((form: FormData) => string),
  work: (form: FormData, event: RequestEvent, orderId: string) => Promise<unknown>,
) {
  return formAction(name, async (form, event: RequestEvent) => {
    await work(form, event, event.params.id);
    redirect(303, `/orders/${event.params.id}#${typeof anchor === 'string' ? anchor : anchor(form)}`);
  });
}

const ofMilestone = (form: FormData) => `milestone-${String(form.get('milestoneId'))}`;

export const actions: Actions = {
  acknowledge: act('acknowledge', 'state', (_form, event, orderId) =>
    acknowledgeOrder(database(), actorOf(event), { orderId }),
  ),
  decline: act('decline', 'state', (form, event, orderId) =>
    declineOrder(database(), actorOf(event), { orderId, ...parseInput(declineForm, fields(form)) }),
  ),
  drawing: act('drawing', 'drawings', (form, event, orderId) =>
    submitDrawing(database(), actorOf(event), { orderId, ...parseInput(drawingForm, fields(form)) }),
  ),
  judge: act('judge', 'drawings', (form, event) => {
    const { version, ...input } = parseInput(judgeDrawingForm, fields(form));
    return judgeDrawing(database(), actorOf(event), { ...input, ...(version ? { version } : {}) });
  }),
  submit: act('submit', ofMilestone, (form, event) => {
    const { version, ...input } = parseInput(submitForm, fields(form));
    return submitMilestone(database(), actorOf(event), { ...input, ...(version ? { version } : {}) });
  }),
  accept: act('accept', ofMilestone, (form, event) => {
    const { version, ...input } = parseInput(milestoneForm, fields(form));
    return acceptSubmission(database(), actorOf(event), { ...input, ...(version ? { version } : {}) });
  }),
  return: act('return', ofMilestone, (form, event) => {
    const { version, ...input } = parseInput(returnForm, fields(form));
    return returnSubmission(database(), actorOf(event), { ...input, ...(version ? { version } : {}) });
  }),
  concede: act('concede', 'pieces', (form, event) =>
    concedeMiss(database(), actorOf(event), parseInput(concedeForm, fields(form))),
  ),
  remake: act('remake', 'pieces', (form, event) =>
    askRemake(database(), actorOf(event), parseInput(remakeForm, fields(form))),
  ),
  ship: act('ship', 'delivery', (form, event, orderId) =>
    shipOrder(database(), actorOf(event), { orderId, ...parseInput(shipForm, fields(form)) }),
  ),
  proof: act('proof', 'delivery', (form, event) =>
    enterDeliveryProof(database(), actorOf(event), parseInput(proofForm, fields(form))),
  ),
  receipt: act('receipt', 'delivery', (form, event) =>
    confirmReceipt(database(), actorOf(event), parseInput(receiptForm, fields(form))),
  ),
  message: act('message', 'messages', (form, event, orderId) =>
    postMessage(
      database(),
      actorOf(event),
      orderId,
      parseInput(orderMessageInput, {
        ...fields(form),
        files: parseInput(fileIdsForm, form.getAll('files')),
      }),
    ),
  ),
  suspend: act('suspend', 'state', (_form, event, orderId) =>
    suspendOrder(database(), actorOf(event), { orderId }),
  ),
  endByRight: act('endByRight', 'state', (form, event, orderId) => {
    requireFreshSession(event.locals.session);
    return endByRight(database(), actorOf(event), { orderId, ...parseInput(groundForm, fields(form)) });
  }),
  answerEnd: act('answerEnd', 'end', (form, event) => {
    requireFreshSession(event.locals.session);
    return answerEnd(database(), actorOf(event), parseInput(answerEndForm, fields(form)));
  }),
};
