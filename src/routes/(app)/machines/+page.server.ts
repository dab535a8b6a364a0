import { can } from '$lib/domain/policy.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { listMachines } from '$lib/server/machines/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      machines: await listMachines(database(), actor, { withArchived: true }),
      severalCompanies: actor.memberships.filter((m) => m.kind === 'buyer').length > 1,
      mayAdd: actor.memberships.some((m) => can(actor, 'machine.edit', { companyId: m.companyId })),
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
    };
  });
