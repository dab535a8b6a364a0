import { redirect } from '@sveltejs/kit';
import { AppError } from '$lib/domain/errors.ts';
import { can } from '$lib/domain/policy.ts';
import { askBidAgain, decideException } from '$lib/server/bids/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import { compareBids } from '$lib/server/workflows/compare-bids.ts';
import { awardBid, decideApproval } from '$lib/server/workflows/award-bid.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = async (event) => {
  if (!event.locals.actor) redirect(303, `/sign-in?next=${encodeURIComponent(event.url.pathname)}`);
  return loading(async () => {
    const actor = actorOf(event);
    const comparison = await compareBids(database(), actor, event.params.id);
    const { companyId } = comparison.request;
    return {
      ...comparison,
      approvals: comparison.approvals.map((row) => ({
        ...row,
        mine: row.requestedBy === actor.userId,
        mayDecide: can(actor, 'award.approve', { companyId, notUserId: row.requestedBy }),
      })),
      mayAward: can(actor, 'award.make', { companyId }),
      emailVerified: actor.emailVerified,
      timeZone: actor.timeZone,
      /** The bid to be checked once more before the award. */
      confirming: event.url.searchParams.get('award'),
    };
  });
};

const text = (form: FormData, name: string) => String(form.get(name) ?? '');

export const actions: Actions = {
  exception: formAction('exception', async (form, event: RequestEvent) => {
    const decision = text(form, 'decision');
    if (decision !== 'accept' && decision !== 'refuse') throw new AppError('invalid-input');
    await decideException(database(), actorOf(event), {
      exceptionId: text(form, 'exceptionId'),
      decision,
      reason: text(form, 'reason').slice(0, 1000),
    });
    redirect(303, event.url.pathname);
  }),
  award: formAction('award', async (form, event: RequestEvent) => {
    const version = Number(text(form, 'version'));
    if (!Number.isSafeInteger(version)) throw new AppError('invalid-input');
    const outcome = await awardBid(database(), actorOf(event), { bidId: text(form, 'bidId'), version });
    redirect(303, outcome.kind === 'awarded' ? `/orders/${outcome.orderId}` : event.url.pathname);
  }),
  again: formAction('again', async (form, event: RequestEvent) => {
    const version = Number(text(form, 'version'));
    if (!Number.isSafeInteger(version)) throw new AppError('invalid-input');
    await askBidAgain(database(), actorOf(event), { bidId: text(form, 'bidId'), version });
    redirect(303, event.url.pathname);
  }),
  approve: formAction('approve', async (form, event: RequestEvent) => {
    const decision = text(form, 'decision');
    if (decision !== 'give' && decision !== 'refuse') throw new AppError('invalid-input');
    const outcome = await decideApproval(database(), actorOf(event), {
      approvalId: text(form, 'approvalId'),
      decision,
      reason: text(form, 'reason').slice(0, 1000),
    });
    redirect(303, outcome.kind === 'awarded' ? `/orders/${outcome.orderId}` : event.url.pathname);
  }),
};
