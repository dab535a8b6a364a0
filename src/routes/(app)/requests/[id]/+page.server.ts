import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { requestPage } from '$lib/server/search/index.ts';
import { answerQuestion, askQuestion } from '$lib/server/workflows/request-questions.ts';
import { withdrawRequest } from '$lib/server/workflows/withdraw-request.ts';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    return {
      page: await requestPage(database(), actor, event.params.id),
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
      emailVerified: actor.emailVerified,
      commandId: newId(),
    };
  });

const words = (name: string, least: number) =>
  z
    .string({ error: `Write ${name}.` })
    .trim()
    .min(least, `Write ${name}.`)
    .max(4000, 'At most 4000 characters.');

const asking = z.object({
  companyId: z.string().min(1),
  commandId: z.string().min(10).max(60),
  kind: z.enum(['clarification', 'proposal'], { error: 'Choose who may read it.' }),
  text: words('your question', 5),
});
const answering = z.object({
  questionId: z.string().min(1),
  version: z.coerce.number().int().min(1),
  answer: words('an answer', 1),
});
const withdrawing = z.object({
  version: z.coerce.number().int().min(1),
  reason: z.string().trim().max(1000, 'At most 1000 characters.').default(''),
});

export const actions: Actions = {
  ask: formAction('ask', async (form, event) => {
    const input = parseInput(asking, Object.fromEntries(form));
    await askQuestion(database(), actorOf(event), { requestId: event.params.id, ...input });
    redirect(303, `${event.url.pathname}#questions`);
  }),
  answer: formAction('answer', async (form, event) => {
    const parsed = answering.safeParse(Object.fromEntries(form));
    if (!parsed.success) {
      // Several answers stand on the page: the message belongs to the field of its own question.
      const field = `answer-${String(form.get('questionId') ?? '')}`;
      throw new AppError('invalid-input', {
        fields: { [field]: 'Write an answer of at most 4000 characters.' },
      });
    }
    await answerQuestion(database(), actorOf(event), parsed.data);
    redirect(303, `${event.url.pathname}#questions`);
  }),
  withdraw: formAction('withdraw', async (form, event) => {
    const input = parseInput(withdrawing, Object.fromEntries(form));
    await withdrawRequest(database(), actorOf(event), { requestId: event.params.id, ...input });
    redirect(303, event.url.pathname);
  }),
};
