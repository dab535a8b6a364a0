import { can } from '$lib/domain/policy.ts';
import { roleText } from '$lib/domain/roles.ts';
import { acceptInvitation, invitationByToken } from '$lib/server/companies/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const { actor } = event.locals;
    const invitation = await invitationByToken(database(), event.params.token, actor);
    const { companyId, ...shown } = invitation;
    return {
      invitation: {
        ...shown,
        roles: invitation.roles.map((role) => roleText[role]),
      },
      companyId: can(actor, 'company.view', { companyId }) ? companyId : null,
      viewer: actor && {
        email: actor.email,
        fits: actor.email.toLowerCase() === invitation.email && actor.emailVerified,
        timeZone: actor.timeZone,
      },
      here: event.url.pathname,
    };
  });

export const actions: Actions = {
  default: formAction('accept', async (_form, event) => {
    const companyId = await acceptInvitation(database(), actorOf(event), event.params['token'] ?? '');
    redirect(303, `/companies/${companyId}`);
  }),
};
