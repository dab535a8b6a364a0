import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import { notification } from '../../../src/lib/server/db/schema/platform.ts';
import {
  listNotifications,
  markRead,
  openNotification,
  unreadCount,
} from '../../../src/lib/server/notifications/index.ts';
import { notify } from '../../../src/lib/server/outbox/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aPerson } from '../../support/people.ts';

let t: TestDatabase;
let me: Actor;
let other: Actor;

beforeEach(async () => {
  t = await testDatabase();
  me = await aPerson(t.db);
  other = await aPerson(t.db);
});
afterEach(() => t.close());

async function tell(who: Actor, count: number, href = '/orders/1') {
  await transact(t.db, async (tx) => {
    for (let n = 0; n < count; n += 1) {
      await notify(tx, [{ userId: who.userId, email: who.email }], {
        kind: 'test-news',
        subject: `News ${n}`,
        content: { heading: 'News', paragraphs: [] },
        about: { type: 'order', id: '1' },
        href,
      });
    }
  });
}
const mine = () => t.db.select().from(notification).where(eq(notification.userId, me.userId));

test('each person sees and counts their own, newest first, until read', async () => {
  await tell(me, 3);
  await tell(other, 2);
  expect([await unreadCount(t.db, me), await unreadCount(t.db, other)]).toEqual([3, 2]);
  const { items, next } = await listNotifications(t.db, me);
  expect(items.map((item) => item.title)).toEqual(['News 2', 'News 1', 'News 0']);
  expect(next).toBeNull();
  expect(await markRead(t.db, me, [items[0]?.id ?? ''])).toBe(1);
  expect(await unreadCount(t.db, me)).toBe(2);
  expect((await listNotifications(t.db, me, { unreadOnly: true })).items).toHaveLength(2);
  expect(await markRead(t.db, me, 'all')).toBe(2);
  expect([await unreadCount(t.db, me), await unreadCount(t.db, other)]).toEqual([0, 2]);
});

test('pages neither lose nor repeat any, even of one moment', async () => {
  await tell(me, 90);
  const at = (await mine())[0]?.at ?? 0;
  await t.db.update(notification).set({ at });
  const seen: string[] = [];
  let after: string | null = null;
  do {
    const page: Awaited<ReturnType<typeof listNotifications>> = await listNotifications(t.db, me, { after });
    seen.push(...page.items.map((item) => item.id));
    after = page.next;
  } while (after);
  expect(new Set(seen).size).toBe(90);
  expect(seen).toHaveLength(90);
});

test('the count stops at a hundred', async () => {
  await tell(me, 120);
  expect(await unreadCount(t.db, me)).toBe(100);
});

test('nobody reads or opens what is for somebody else', async () => {
  await tell(me, 1);
  const [row] = await mine();
  const id = row?.id ?? '';
  expect(await markRead(t.db, other, [id])).toBe(0);
  await expect(openNotification(t.db, other, id)).rejects.toMatchObject({ code: 'not-found' });
  expect((await mine())[0]?.readAt).toBeNull();
  expect(await openNotification(t.db, me, id)).toBe('/orders/1');
  expect((await mine())[0]?.readAt).not.toBeNull();
});

test('opening never leads off the site', async () => {
  for (const href of ['//elsewhere.example/x', 'https://elsewhere.example', '/\\elsewhere.example']) {
    await tell(me, 1, href);
  }
  for (const row of await mine()) {
    expect(await openNotification(t.db, me, row.id)).toBe('/notifications');
  }
  expect(await unreadCount(t.db, me)).toBe(0);
});

test('a cursor that is none starts at the beginning', async () => {
  await tell(me, 2);
  expect((await listNotifications(t.db, me, { after: `1' or 1=1 --` })).items).toHaveLength(2);
});
