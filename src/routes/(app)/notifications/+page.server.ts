import { redirect } from '@sveltejs/kit';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading } from '$lib/server/http/index.ts';
import {
  listNotifications,
  markRead,
  openNotification,
  unreadCount,
} from '$lib/server/notifications/index.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const unreadOnly = event.url.searchParams.get('show') === 'unread';
    const after = event.url.searchParams.get('after');
    return {
      ...(await listNotifications(database(), actor, { after, unreadOnly })),
      unreadOnly,
      paged: after !== null,
      unread: await unreadCount(database(), actor),
      timeZone: actor.timeZone,
    };
  });

export const actions: Actions = {
  open: formAction('open', async (form, event: RequestEvent) => {
    redirect(303, await openNotification(database(), actorOf(event), String(form.get('id') ?? '')));
  }),
  read: formAction('read', async (form, event: RequestEvent) => {
    await markRead(database(), actorOf(event), [String(form.get('id') ?? '')]);
    redirect(303, '/notifications');
  }),
  readAll: formAction('readAll', async (_form, event: RequestEvent) => {
    await markRead(database(), actorOf(event), 'all');
    redirect(303, '/notifications');
  }),
};
