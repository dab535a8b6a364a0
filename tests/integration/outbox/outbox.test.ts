import { eq } from 'drizzle-orm';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { transact } from '../../../src/lib/server/db/index.ts';
import { notification, outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { enqueueMail, notify, sendDueMails, type SendMail } from '../../../src/lib/server/outbox/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aPerson } from '../../support/people.ts';

let t: TestDatabase;
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

type Mail = Parameters<SendMail>[0];

/** A mail server that keeps what it took, and can be told to refuse. */
function aServer() {
  const taken: Mail[] = [];
  let calls = 0;
  const state = { dead: false, failing: (_mail: Mail) => false };
  const send: SendMail = (mail) => {
    calls += 1;
    if (state.dead || state.failing(mail)) return Promise.reject(new Error('connection refused'));
    taken.push(mail);
    return Promise.resolve();
  };
  return { taken, state, send, calls: () => calls };
}

const put = (subject: string, extra: { secret?: boolean; dedupeKey?: string; email?: string } = {}) =>
  enqueueMail(t.db, {
    kind: 'test',
    to: { userId: null, email: extra.email ?? 'someone@works.example' },
    subject,
    content: {
      heading: 'Heading <b>',
      paragraphs: ['A & B'],
      facts: [['Order', 'O-1001']],
      action: { label: 'Open', path: '/orders/1' },
    },
    about: { type: 'order', id: '1' },
    ...(extra.secret ? { secret: true } : {}),
    ...(extra.dedupeKey ? { dedupeKey: extra.dedupeKey } : {}),
  });

const rows = () => t.db.select().from(outboxMail).orderBy(outboxMail.id);
const due = () => t.db.update(outboxMail).set({ runAt: 0 });
const send = (server: { send: SendMail }, owner = 'w1', limit = 20) =>
  sendDueMails(t.db, server.send, { owner, limit });

test('mails go out in the order of their events, each once, with the outbox id as Message-ID', async () => {
  for (let i = 0; i < 5; i += 1) await put(`mail ${i}`);
  const server = aServer();
  expect(await send(server)).toEqual({ sent: 5, failed: 0 });
  expect(await send(server)).toEqual({ sent: 0, failed: 0 });
  expect(server.taken.map((m) => m.subject)).toEqual([0, 1, 2, 3, 4].map((i) => `mail ${i}`));
  expect(server.taken.map((m) => m.messageId)).toEqual((await rows()).map((row) => row.id));
});

test('a mail is HTML and text with a whole link, and what people typed is text in it', async () => {
  await put('s');
  const server = aServer();
  await send(server);
  const [mail] = server.taken;
  expect(mail?.text).toContain('http://localhost:3000/orders/1');
  expect(mail?.html).toContain('href="http://localhost:3000/orders/1"');
  expect(mail?.html).toContain('Heading &lt;b&gt;');
  expect(mail?.html).toContain('A &amp; B');
  expect(mail?.html).not.toContain('<b>');
});

test('line breaks never reach a header', async () => {
  await put('Subject\r\nBcc: all@works.example', { email: 'a@works.example\nX: y' });
  const [row] = await rows();
  expect(`${row?.subject}${row?.toEmail}`).not.toMatch(/[\r\n]/);
});

test('a mail is written with its event or not at all', async () => {
  const failing = transact(t.db, async (tx) => {
    await enqueueMail(tx, {
      kind: 'test',
      to: { userId: null, email: 'a@works.example' },
      subject: 's',
      content: { heading: 'h', paragraphs: [] },
      about: { type: 'x', id: '1' },
    });
    throw new Error('on purpose');
  });
  await expect(failing).rejects.toThrow('on purpose');
  expect(await rows()).toEqual([]);
});

test('the same key is sent once', async () => {
  await put('first', { dedupeKey: 'k' });
  await put('second', { dedupeKey: 'k' });
  const server = aServer();
  await send(server);
  expect(server.taken.map((m) => m.subject)).toEqual(['first']);
});

test('a dead server is asked once per round, not once per mail, and not again before its time', async () => {
  for (let i = 0; i < 10; i += 1) await put(`mail ${i}`);
  const server = aServer();
  server.state.dead = true;
  expect(await send(server)).toEqual({ sent: 0, failed: 1 });
  expect(server.calls()).toBe(1);
  const after = await rows();
  expect(after.map((row) => row.attempts)).toEqual([1, 0, 0, 0, 0, 0, 0, 0, 0, 0]);
  expect((after[0]?.runAt ?? 0) - Date.now()).toBeGreaterThan(1000);
  server.state.dead = false;
  await due();
  expect((await send(server)).sent).toBe(10);
  expect(server.taken[0]?.subject).toBe('mail 0');
});

test('a mail that is never taken holds up no other, is put aside after its last try and says why', async () => {
  await put('bad');
  await put('good');
  const server = aServer();
  server.state.failing = (mail) => mail.subject === 'bad';
  await send(server);
  // The bad one waits for its next try now; the good one passes it.
  expect((await send(server)).sent).toBe(1);
  for (let i = 1; i < 16; i += 1) {
    await due();
    await send(server);
  }
  expect(await rows()).toMatchObject([
    { subject: 'bad', state: 'dead', attempts: 16, lastError: 'connection refused' },
    { subject: 'good', state: 'sent' },
  ]);
  await due();
  const calls = server.calls();
  await send(server);
  expect(server.calls()).toBe(calls);
});

test('two workers at once never send the same mail', async () => {
  for (let i = 0; i < 30; i += 1) await put(`mail ${i}`);
  const server = aServer();
  const other = t.openAnother();
  const results = await Promise.all([
    send(server, 'w1', 7),
    sendDueMails(other, server.send, { owner: 'w2', limit: 7 }),
    send(server, 'w3', 7),
    sendDueMails(other, server.send, { owner: 'w4', limit: 9 }),
  ]);
  expect(results.reduce((sum, r) => sum + r.sent, 0)).toBe(30);
  expect(new Set(server.taken.map((m) => m.messageId)).size).toBe(30);
});

test('what a crashed worker held is sent by the next once its lease has run out', async () => {
  await put('held');
  await t.db
    .update(outboxMail)
    .set({ state: 'sending', leaseOwner: 'gone', leaseUntil: Date.now() + 60_000, attempts: 1 });
  const server = aServer();
  expect((await send(server)).sent).toBe(0);
  await t.db.update(outboxMail).set({ leaseUntil: Date.now() - 1 });
  expect((await send(server)).sent).toBe(1);
  expect((await rows())[0]).toMatchObject({ state: 'sent', leaseOwner: null });
});

test('a worker told to stop gives the rest of its batch back untouched', async () => {
  for (let i = 0; i < 4; i += 1) await put(`mail ${i}`);
  const stop = new AbortController();
  const server = aServer();
  const stopping: SendMail = async (mail) => {
    await server.send(mail);
    stop.abort();
  };
  await sendDueMails(t.db, stopping, { owner: 'w1', signal: stop.signal });
  expect((await rows()).map((row) => [row.state, row.attempts])).toEqual([
    ['sent', 1],
    ['queued', 0],
    ['queued', 0],
    ['queued', 0],
  ]);
  expect((await send(server, 'w2')).sent).toBe(3);
});

test('each recipient of an event gets a mail, people with an account a notification too', async () => {
  const person = await aPerson(t.db);
  await transact(t.db, (tx) =>
    notify(
      tx,
      [
        { userId: person.userId, email: person.email },
        { userId: null, email: 'outside@works.example' },
      ],
      {
        kind: 'bid-received',
        subject: 'A bid has come in',
        content: { heading: 'A bid', paragraphs: [] },
        about: { type: 'bid', id: '1' },
        href: '/requests/1',
        dedupeKey: 'bid/1',
      },
    ),
  );
  expect((await rows()).map((row) => row.toEmail).sort()).toEqual(
    [person.email, 'outside@works.example'].sort(),
  );
  expect(await t.db.select().from(notification).where(eq(notification.userId, person.userId))).toMatchObject([
    { title: 'A bid has come in', href: '/requests/1', readAt: null },
  ]);
});
