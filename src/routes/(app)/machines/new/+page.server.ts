import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { can } from '$lib/domain/policy.ts';
import { readMachine } from '$lib/schemas/forms/machine-form.ts';
import { newMachineValues } from '$lib/schemas/forms/machine-texts.ts';
import { machineIntent } from '$lib/schemas/forms/machine-intent.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { createMachine } from '$lib/server/machines/index.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const companies = actor.memberships.filter((m) => can(actor, 'machine.edit', { companyId: m.companyId }));
    if (companies.length === 0) throw new AppError('not-allowed');
    return {
      companies: companies.map((m) => ({ value: m.companyId, label: m.companyName })),
      values: newMachineValues(),
      unitSet: actor.unitSet,
      commandId: newId(),
    };
  });

const head = z.object({ companyId: z.string().min(1), commandId: z.string().min(10).max(60) });

export const actions: Actions = {
  save: formAction('machine', async (form, event) => {
    const actor = actorOf(event);
    const { values, unitSet, rowsChanged } = machineIntent(form);
    if (rowsChanged) return { form: 'machine', rows: values, unitSet };
    const { companyId, commandId } = parseInput(head, Object.fromEntries(form));
    const { machine, errors, missing } = readMachine(values, unitSet);
    if (!machine) {
      const gaps = Object.fromEntries(missing.map((path) => [path, 'This answer is needed.']));
      throw new AppError('invalid-input', { fields: { ...gaps, ...errors } });
    }
    const { id } = await createMachine(database(), actor, { companyId, commandId, machine });
    redirect(303, `/machines/${id}`);
  }),
};
