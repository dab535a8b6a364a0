import { and, count, desc, eq, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { Reader } from '../db/index.ts';
import { notification } from '../db/schema/platform.ts';
import { companyDeskItems } from '../companies/index.ts';
import { orderDeskItems } from '../orders/index.ts';
import { requestDeskItems } from './request-desk.ts';

/** One thing that waits: for the actor, or for somebody else in a matter of the actor's companies. */
export interface DeskItem {
  /** Unique on the desk, e.g. `milestone/<id>/fund`. */
  id: string;
  /** What is to be done, beginning with the verb: “Approve the drawing, revision B”. */
  title: string;
  /** What it is about: “Order O-1004, Copperfold Works”. */
  detail: string;
  /** The exact page on which it is done. */
  href: string;
  /** When the wait ends, business time in ms; null when nothing presses. */
  dueAt: number | null;
  /** `me`: this person may do it now; `others`: who must act instead is in `who`. */
  waitsFor: 'me' | 'others';
  who?: string;
}

/** Gives what waits in one domain; asks its own policy for what the actor may do. */
export type DeskProvider = (reader: Reader, actor: Actor) => Promise<DeskItem[]>;

/** A domain adds its provider here; each is one query or two, never one per row. */
export const deskProviders: readonly DeskProvider[] = [companyDeskItems, requestDeskItems, orderDeskItems];

export interface DeskView {
  mine: DeskItem[];
  others: DeskItem[];
  recent: { id: string; title: string; href: string; at: number; unread: boolean }[];
}

const byDue = (a: DeskItem, b: DeskItem) =>
  (a.dueAt ?? Number.MAX_SAFE_INTEGER) - (b.dueAt ?? Number.MAX_SAFE_INTEGER) || (a.id < b.id ? -1 : 1);

const mostItems = 100;

/** What waits for the actor and for others, the most pressing first, and what happened lately. */
export async function deskOf(
  reader: Reader,
  actor: Actor,
  providers: readonly DeskProvider[] = deskProviders,
): Promise<DeskView> {
  const items: DeskItem[] = [];
  for (const provider of providers) items.push(...(await provider(reader, actor)));
  items.sort(byDue);
  const recent = await reader
    .select({
      id: notification.id,
      title: notification.title,
      href: notification.href,
      at: notification.at,
      readAt: notification.readAt,
    })
    .from(notification)
    .where(eq(notification.userId, actor.userId))
    .orderBy(desc(notification.at), desc(notification.id))
    .limit(8);
  return {
    mine: items.filter((item) => item.waitsFor === 'me').slice(0, mostItems),
    others: items.filter((item) => item.waitsFor === 'others').slice(0, mostItems),
    recent: recent.map(({ readAt, ...row }) => ({ ...row, unread: readAt === null })),
  };
}

/** How many notifications the actor has not read yet; for the mark in the head of every page. */
export async function unreadNotifications(reader: Reader, actor: Actor): Promise<number> {
  const [row] = await reader
    .select({ n: count() })
    .from(notification)
    .where(and(eq(notification.userId, actor.userId), isNull(notification.readAt)));
  return row?.n ?? 0;
}
