import { countryOptions } from '$lib/domain/countries.ts';
import { AppError } from '$lib/domain/errors.ts';
import { dimensionTable } from '$lib/induction/units/dimensions.ts';
import {
  askingInput,
  capabilityLists,
  fabricatorProfileInput,
  listsOf,
  type FabricatorProfileInput,
} from '$lib/schemas/forms/verification.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { listCompanyDocuments } from '$lib/server/files/index.ts';
import { actorOf, fieldMessages, formAction, loading } from '$lib/server/http/index.ts';
import {
  askForVerification,
  companyVerification,
  saveFabricatorProfile,
  withdrawAsking,
} from '$lib/server/verification/index.ts';
import { can } from '$lib/domain/policy.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const companyId = event.params.id;
    const found = await companyVerification(database(), actor, companyId);
    return {
      ...found,
      documents: can(actor, 'company.documents', { companyId })
        ? await listCompanyDocuments(database(), actor, companyId)
        : [],
      countries: countryOptions(),
      unit: dimensionTable.length.field[actor.unitSet],
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
      commandId: newId(),
    };
  });

/** A failure keeps what was ticked too. */
async function keepingLists<T>(form: FormData, work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (problem) {
    if (!(problem instanceof AppError)) throw problem;
    const lists = Object.fromEntries(capabilityLists.map((name) => [name, form.getAll(name).map(String)]));
    throw new AppError(problem.code, {
      fields: problem.fields,
      ...(problem.detail === undefined ? {} : { detail: problem.detail }),
      data: { lists },
      cause: problem,
    });
  }
}

function inputOf(form: FormData, event: RequestEvent, asks: boolean) {
  const raw = listsOf(form, capabilityLists);
  const profile = fabricatorProfileInput(actorOf(event).unitSet).safeParse(raw);
  const asking = askingInput.safeParse(raw);
  const fields = {
    ...(profile.success ? {} : fieldMessages(profile.error)),
    ...(asking.success || !asks ? {} : fieldMessages(asking.error)),
  };
  if (!profile.success || Object.keys(fields).length > 0) throw new AppError('invalid-input', { fields });
  return { profile: profile.data satisfies FabricatorProfileInput, asking: asking.data };
}

export const actions: Actions = {
  save: formAction('profile', (form, event: RequestEvent) =>
    keepingLists(form, async () => {
      const { profile } = inputOf(form, event, false);
      await saveFabricatorProfile(database(), actorOf(event), event.params.id, profile);
      return { done: 'profile', words: 'Saved. The directory shows it as what you declare.' };
    }),
  ),
  ask: formAction('profile', (form, event: RequestEvent) =>
    keepingLists(form, async () => {
      const { profile, asking } = inputOf(form, event, true);
      if (!asking) throw new AppError('invalid-input');
      await askForVerification(database(), actorOf(event), event.params.id, { profile, ...asking });
      return { done: 'profile', words: 'Asked. You get a mail when it is decided.' };
    }),
  ),
  withdraw: formAction('withdraw', async (form, event: RequestEvent) => {
    const version = Number(form.get('version'));
    if (!Number.isSafeInteger(version)) throw new AppError('body-unreadable');
    await withdrawAsking(database(), actorOf(event), String(form.get('caseId') ?? ''), { version });
    return { done: 'withdraw', words: 'The asking is withdrawn.' };
  }),
};
