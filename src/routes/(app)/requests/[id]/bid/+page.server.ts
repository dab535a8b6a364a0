import { error, redirect } from '@sveltejs/kit';
import { defaultMilestonePlan } from '$lib/domain/bid.ts';
import { can } from '$lib/domain/policy.ts';
import { AppError } from '$lib/domain/errors.ts';
import { bidFormValues, parseBidForm } from '$lib/schemas/forms/bid.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import {
  confirmBid,
  ownBid,
  requestForBidder,
  reviseBid,
  saveBid,
  submitBid,
  withdrawBid,
} from '$lib/server/bids/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

/** The fabricator company that bids: the one asked for, or the first that may. */
function biddingCompany(event: Pick<RequestEvent, 'locals' | 'url'>): string {
  const actor = actorOf(event);
  const asked = event.url.searchParams.get('company');
  const mine = actor.memberships.filter((m) => m.kind === 'fabricator');
  const chosen =
    mine.find((m) => m.companyId === asked) ??
    mine.find((m) => can(actor, 'bid.edit', { companyId: m.companyId })) ??
    mine[0];
  if (!chosen) throw new AppError('not-found');
  return chosen.companyId;
}

export const load: PageServerLoad = async (event) => {
  if (!event.locals.actor) redirect(303, `/sign-in?next=${encodeURIComponent(event.url.pathname)}`);
  return loading(async () => {
    const actor = actorOf(event);
    const companyId = biddingCompany(event);
    const request = await requestForBidder(database(), actor, event.params.id, companyId);
    const bid = await ownBid(database(), actor, event.params.id, companyId);
    const starting = {
      body: {
        lines: [],
        taxLines: [],
        milestonePlan: defaultMilestonePlan,
        toolingOwner: 'none' as const,
        warrantyMonths: 12,
        note: '',
      },
      leadTimeWorkingDays: 0,
      validUntil: request.suggestedValidity,
      exceptions: [],
    };
    return {
      request,
      companyId,
      mayEdit: can(actor, 'bid.edit', { companyId }),
      emailVerified: actor.emailVerified,
      timeZone: actor.timeZone,
      bid: bid && {
        id: bid.id,
        number: bid.number,
        state: bid.state,
        version: bid.version,
        currency: bid.currency,
        exceptions: bid.exceptions,
        files: bid.files,
        submittedAt: bid.submittedAt,
      },
      values: bidFormValues(bid ?? starting),
      commandId: newId(),
    };
  });
};

async function inputOf(form: FormData, event: RequestEvent, strict: boolean) {
  const actor = actorOf(event);
  const companyId = biddingCompany(event);
  const request = await requestForBidder(database(), actor, event.params.id, companyId);
  const parsed = parseBidForm(form, request.milestoneLimits, strict);
  if (!parsed.ok) throw new AppError('invalid-input', { fields: parsed.fields });
  const version = Number(form.get('version') ?? '');
  return {
    actor,
    input: {
      requestId: event.params.id,
      companyId,
      commandId: String(form.get('commandId') ?? newId()),
      version: Number.isSafeInteger(version) && version > 0 ? version : null,
      values: parsed.values,
    },
  };
}

function seen(form: FormData) {
  const version = Number(form.get('version'));
  const bidId = String(form.get('bidId') ?? '');
  if (!Number.isSafeInteger(version) || bidId === '') error(400, { message: 'The form is incomplete.' });
  return { bidId, version };
}

const back = (event: RequestEvent) =>
  redirect(303, `${event.url.pathname}${event.url.search.replace(/\?\/\w+&?/, '?').replace(/\?$/, '')}`);

export const actions: Actions = {
  save: formAction('bid', async (form, event: RequestEvent) => {
    const { actor, input } = await inputOf(form, event, false);
    await saveBid(database(), actor, input);
    back(event);
  }),
  submit: formAction('bid', async (form, event: RequestEvent) => {
    const { actor, input } = await inputOf(form, event, true);
    await submitBid(database(), actor, input);
    back(event);
  }),
  revise: formAction('state', async (form, event: RequestEvent) => {
    await reviseBid(database(), actorOf(event), seen(form));
    back(event);
  }),
  withdraw: formAction('state', async (form, event: RequestEvent) => {
    await withdrawBid(database(), actorOf(event), seen(form));
    back(event);
  }),
  confirm: formAction('state', async (form, event: RequestEvent) => {
    await confirmBid(database(), actorOf(event), seen(form));
    back(event);
  }),
};
