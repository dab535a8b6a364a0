import { z } from 'zod';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import {
  ledgerOverview,
  milestonesWithAttention,
  openAlarms,
  reconcileAsAdmin,
  resolveAlarm,
  retryMoney,
} from '$lib/server/money/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const db = database();
    return {
      zone: actor.timeZone,
      ...(await ledgerOverview(db, actor)),
      alarms: (await openAlarms(db, actor)).map(({ id, kind, detail, at, orderId, objectId }) => ({
        id,
        kind,
        detail,
        at,
        orderId,
        objectId,
      })),
      attention: await milestonesWithAttention(db, actor),
    };
  });

const resolveForm = z.object({ alarmId: z.uuid(), resolution: z.string().trim().max(1000).default('') });
const retryForm = z.object({ milestoneId: z.uuid() });

export const actions: Actions = {
  reconcile: formAction('reconcile', async (_form, event: RequestEvent) => {
    const result = await reconcileAsAdmin(database(), actorOf(event));
    return {
      words: `${result.compared} balance transactions compared, ${result.differences.length} differences.`,
    };
  }),
  resolve: formAction('resolve', async (form, event: RequestEvent) => {
    await resolveAlarm(database(), actorOf(event), parseInput(resolveForm, Object.fromEntries(form)));
    return { words: 'The alarm is closed.' };
  }),
  retry: formAction('retry', async (form, event: RequestEvent) => {
    await retryMoney(database(), actorOf(event), parseInput(retryForm, Object.fromEntries(form)));
    return { words: 'It is tried again under a new key.' };
  }),
};
