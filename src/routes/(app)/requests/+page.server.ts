import { can } from '$lib/domain/policy.ts';
import { requestStates, type RequestState } from '$lib/domain/request-states.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { listRequests } from '$lib/server/requests/index.ts';
import type { PageServerLoad } from './$types.ts';

const groups: Record<string, readonly RequestState[]> = {
  drafts: ['draft'],
  open: ['posted', 'closed', 're-opened'],
  past: ['awarded', 'done', 'ended', 'withdrawn', 'lapsed'],
};

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const show = event.url.searchParams.get('show') ?? 'all';
    const before = event.url.searchParams.get('before');
    return {
      show: show in groups ? show : 'all',
      page: await listRequests(database(), actor, {
        states: groups[show] ?? requestStates,
        ...(before && /^\d+_[0-9a-f-]{36}$/.test(before) ? { before } : {}),
      }),
      continued: before !== null,
      severalCompanies: actor.memberships.filter((m) => m.kind === 'buyer').length > 1,
      mayCreate: actor.memberships.some((m) => can(actor, 'request.edit', { companyId: m.companyId })),
      timeZone: actor.timeZone,
    };
  });
