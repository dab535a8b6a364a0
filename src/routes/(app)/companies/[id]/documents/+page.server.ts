import { archiveDocumentInput, companyDocumentInput } from '$lib/schemas/forms/documents.ts';
import { can } from '$lib/domain/policy.ts';
import { database } from '$lib/server/db/index.ts';
import { addCompanyDocument, archiveCompanyDocument, listCompanyDocuments } from '$lib/server/files/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const companyId = event.params.id;
    const archived = event.url.searchParams.get('show') === 'archived';
    const documents = await listCompanyDocuments(database(), actor, companyId, { archived });
    return {
      companyId,
      companyName: actor.memberships.find((m) => m.companyId === companyId)?.companyName ?? '',
      documents: documents.filter((document) => (document.archivedAt !== null) === archived),
      archived,
      mayAsk: can(actor, 'verification.ask', { companyId }),
      timeZone: actor.timeZone,
    };
  });

export const actions: Actions = {
  add: formAction('add', async (form, event: RequestEvent) => {
    const input = parseInput(companyDocumentInput, Object.fromEntries(form));
    await addCompanyDocument(database(), actorOf(event), event.params.id, input);
    return { done: 'add', words: `“${input.title}” is among your documents.` };
  }),
  archive: formAction('archive', async (form, event: RequestEvent) => {
    const input = parseInput(archiveDocumentInput, Object.fromEntries(form));
    await archiveCompanyDocument(database(), actorOf(event), event.params.id, input);
    return { done: 'archive', words: 'The document is archived.' };
  }),
};
