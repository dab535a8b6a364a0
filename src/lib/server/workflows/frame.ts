import { accountDetail, navigationFor } from '../../domain/navigation.ts';
import type { Actor } from '../../domain/actor.ts';
import type { Reader } from '../db/index.ts';
import { unreadNotifications } from './desk.ts';

/** What the frame of every signed-in page shows of the person. */
export async function frameFor(reader: Reader, actor: Actor) {
  return {
    navigation: navigationFor(actor),
    account: { name: actor.name, detail: accountDetail(actor) },
    unread: await unreadNotifications(reader, actor),
    viewer: { timeZone: actor.timeZone, unitSet: actor.unitSet, isAdmin: actor.isAdmin },
  };
}
