import { and, count, desc, eq, inArray, isNull, lt, or } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Database, Reader } from '../db/index.ts';
import { notification } from '../db/schema/platform.ts';

export interface NotificationItem {
  id: string;
  kind: string;
  title: string;
  href: string;
  at: number;
  readAt: number | null;
}

/** How many the person has not read; for the shell, so it stops counting at a hundred. */
export async function unreadCount(reader: Reader, actor: Actor): Promise<number> {
  const unread = reader
    .select({ id: notification.id })
    .from(notification)
    .where(and(eq(notification.userId, actor.userId), isNull(notification.readAt)))
    .limit(100)
    .as('unread');
  const [row] = await reader.select({ n: count() }).from(unread);
  return row?.n ?? 0;
}

const pageSize = 40;

/** `<at>.<id>` of the last one shown. */
function cursorOf(text: string | null | undefined): { at: number; id: string } | null {
  const match = /^(\d{1,16})\.([0-9a-f-]{36})$/.exec(text ?? '');
  return match ? { at: Number(match[1]), id: match[2] ?? '' } : null;
}

/** The person's own notifications, newest first. */
export async function listNotifications(
  reader: Reader,
  actor: Actor,
  options: { after?: string | null; unreadOnly?: boolean } = {},
): Promise<{ items: NotificationItem[]; next: string | null }> {
  const after = cursorOf(options.after);
  const rows = await reader
    .select({
      id: notification.id,
      kind: notification.kind,
      title: notification.title,
      href: notification.href,
      at: notification.at,
      readAt: notification.readAt,
    })
    .from(notification)
    .where(
      and(
        eq(notification.userId, actor.userId),
        ...(options.unreadOnly ? [isNull(notification.readAt)] : []),
        ...(after
          ? [
              or(
                lt(notification.at, after.at),
                and(eq(notification.at, after.at), lt(notification.id, after.id)),
              ),
            ]
          : []),
      ),
    )
    .orderBy(desc(notification.at), desc(notification.id))
    .limit(pageSize + 1);
  const items = rows.slice(0, pageSize);
  const last = items.at(-1);
  return { items, next: rows.length > pageSize && last ? `${last.at}.${last.id}` : null };
}

/** Marks some or all of the person's own as read. Those of others are left alone without a word. */
export async function markRead(
  db: Database,
  actor: Actor,
  which: readonly string[] | 'all',
): Promise<number> {
  if (which !== 'all' && which.length === 0) return 0;
  const result = await db
    .update(notification)
    .set({ readAt: await businessNow(db) })
    .where(
      and(
        eq(notification.userId, actor.userId),
        isNull(notification.readAt),
        ...(which === 'all' ? [] : [inArray(notification.id, [...which])]),
      ),
    );
  return result.rowsAffected;
}

/** Marks one as read and tells where it leads. */
export async function openNotification(db: Database, actor: Actor, id: string): Promise<string> {
  const [row] = await db
    .select({ href: notification.href })
    .from(notification)
    .where(and(eq(notification.id, id), eq(notification.userId, actor.userId)));
  if (!row) throw new AppError('not-found');
  await markRead(db, actor, [id]);
  // Own paths only, whatever the row says.
  return /^\/(?![/\\])/.test(row.href) ? row.href : '/notifications';
}
