import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { can } from '$lib/domain/policy.ts';
import { requirementSchema } from '$lib/schemas/api/requirement.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { listMachines } from '$lib/server/machines/index.ts';
import { createDraft, listRequests, type DraftSource } from '$lib/server/requests/index.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const companies = actor.memberships.filter((m) => can(actor, 'request.edit', { companyId: m.companyId }));
    if (companies.length === 0) throw new AppError('not-allowed');
    const machines = await listMachines(database(), actor);
    const earlier = await listRequests(database(), actor, {});
    return {
      companies: companies.map((m) => ({ value: m.companyId, label: m.companyName })),
      machines: machines.map((m) => ({ id: m.id, companyId: m.companyId, name: m.name })),
      requests: earlier.items.map((r) => ({
        id: r.id,
        companyId: r.companyId,
        number: r.number,
        title: r.title,
      })),
      commandId: newId(),
    };
  });

const schema = z.object({
  companyId: z.string().min(1),
  commandId: z.string().min(10).max(60),
  from: z.enum(['empty', 'machine', 'request', 'json'], { error: 'Choose where the request starts from.' }),
  machineId: z.string().max(40).default(''),
  requestId: z.string().max(40).default(''),
  json: z.string().max(200_000, 'At most 200 kB.').default(''),
});

function needed(field: string, message: string): AppError {
  return new AppError('invalid-input', { fields: { [field]: message } });
}

function sourceOf(input: z.output<typeof schema>): DraftSource {
  switch (input.from) {
    case 'empty':
      return { kind: 'empty' };
    case 'machine':
      if (!input.machineId) throw needed('machineId', 'Choose a machine.');
      return { kind: 'machine', machineId: input.machineId };
    case 'request':
      if (!input.requestId) throw needed('requestId', 'Choose an earlier request.');
      return { kind: 'request', requestId: input.requestId };
    case 'json': {
      let value: unknown;
      try {
        value = JSON.parse(input.json);
      } catch {
        throw needed('json', 'This is not valid JSON.');
      }
      const whole = z.object({ requirement: z.unknown() }).safeParse(value);
      const parsed = requirementSchema.safeParse(whole.success ? whole.data.requirement : value);
      if (!parsed.success) {
        const issue = parsed.error.issues[0];
        throw needed('json', `${issue?.path.join('.') ?? ''}: ${issue?.message ?? 'not a requirement'}`);
      }
      return { kind: 'requirement', requirement: parsed.data };
    }
  }
}

export const actions: Actions = {
  default: formAction('new', async (form, event) => {
    const actor = actorOf(event);
    const input = parseInput(schema, Object.fromEntries(form));
    const { id } = await createDraft(database(), actor, {
      companyId: input.companyId,
      commandId: input.commandId,
      from: sourceOf(input),
    });
    redirect(303, `/requests/${id}/compose`);
  }),
};
