import { roleText } from '$lib/domain/roles.ts';
import { invitationsTo } from '$lib/server/companies/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      companies: actor.memberships.map((m) => ({
        id: m.companyId,
        name: m.companyName,
        kind: m.kind === 'buyer' ? 'Buyer' : 'Fabricator',
        roles: m.roles.map((role) => roleText[role].name).join(', '),
        verified: m.verified,
      })),
      invitations: await invitationsTo(database(), actor),
      mayCreate: !actor.isAdmin,
    };
  });
