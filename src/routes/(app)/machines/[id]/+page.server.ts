import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { readMachine } from '$lib/schemas/forms/machine-form.ts';
import { machineValues } from '$lib/schemas/forms/machine-texts.ts';
import { machineIntent } from '$lib/schemas/forms/machine-intent.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { editMachine, setMachineArchived, viewMachine } from '$lib/server/machines/index.ts';
import { createDraft } from '$lib/server/requests/index.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const machine = await viewMachine(database(), actor, event.params.id);
    return {
      machine: {
        id: machine.id,
        name: machine.body.name,
        archivedAt: machine.archivedAt,
        version: machine.version,
        mayEdit: machine.mayEdit,
        revisions: machine.revisions,
      },
      values: machineValues(machine.body, actor.unitSet),
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
      commandId: newId(),
    };
  });

const seen = z.object({ version: z.coerce.number().int().min(1) });

export const actions: Actions = {
  save: formAction('machine', async (form, event) => {
    const actor = actorOf(event);
    const { values, unitSet, rowsChanged } = machineIntent(form);
    if (rowsChanged) return { form: 'machine', rows: values, unitSet };
    const { version } = parseInput(seen, Object.fromEntries(form));
    const { machine, errors, missing } = readMachine(values, unitSet);
    if (!machine) {
      const gaps = Object.fromEntries(missing.map((path) => [path, 'This answer is needed.']));
      throw new AppError('invalid-input', { fields: { ...gaps, ...errors } });
    }
    await editMachine(database(), actor, { machineId: event.params.id, version, machine });
    redirect(303, event.url.pathname);
  }),
  archive: formAction('archive', async (form, event) => {
    const { version } = parseInput(seen, Object.fromEntries(form));
    await setMachineArchived(database(), actorOf(event), {
      machineId: event.params.id,
      version,
      archived: form.get('archived') === 'yes',
    });
    redirect(303, event.url.pathname);
  }),
  request: formAction('request', async (form, event) => {
    const actor = actorOf(event);
    const machine = await viewMachine(database(), actor, event.params.id);
    const { id } = await createDraft(database(), actor, {
      companyId: machine.companyId,
      commandId: String(form.get('commandId') ?? newId()),
      from: { kind: 'machine', machineId: machine.id },
    });
    redirect(303, `/requests/${id}/compose`);
  }),
};
