import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { listMachines, viewMachine } from '$lib/server/machines/index.ts';
import { viewDraft } from '$lib/server/requests/index.ts';
import { postRequest } from '$lib/server/workflows/post-request.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = async (event) => {
  const actor = await loading(() => Promise.resolve(actorOf(event)));
  const { id } = event.params;
  return loading(async () => {
    const draft = await viewDraft(database(), actor, id).catch((problem: unknown) => {
      // A posted request is no longer composed; to those who may not see it, it does not exist.
      if (problem instanceof AppError && problem.code === 'state-conflict') redirect(303, `/requests/${id}`);
      throw problem;
    });
    const listed = await listMachines(database(), actor, { companyId: draft.companyId });
    const machines = await Promise.all(
      listed.slice(0, 100).map((item) => viewMachine(database(), actor, item.id)),
    );
    return {
      draft,
      machines: machines.map(({ id: machineId, version, body }) => ({ id: machineId, version, body })),
      timeZone: actor.timeZone,
    };
  });
};

const posting = z.object({
  version: z.coerce.number().int().min(1),
  checkId: z.string({ error: 'The server has not checked this version yet.' }).min(1),
});

export const actions: Actions = {
  post: formAction('post', async (form, event) => {
    const input = parseInput(posting, Object.fromEntries(form));
    await postRequest(database(), actorOf(event), { requestId: event.params.id, ...input });
    redirect(303, `/requests/${event.params.id}`);
  }),
};
