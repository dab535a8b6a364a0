import { afterAll, afterEach, beforeAll, beforeEach, expect, test } from 'vitest';
import { z } from 'zod';
import { startMailServer, type RunningMailServer } from '../../../fake-services/mail/server.ts';
import { createMailer } from '../../../src/lib/server/adapters/mailer.ts';
import { outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { enqueueMail, sendDueMails } from '../../../src/lib/server/outbox/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';

let running: RunningMailServer;
let t: TestDatabase;

beforeAll(async () => {
  running = await startMailServer({ smtpPort: 0, webPort: 0 });
});
afterAll(() => running.close());
beforeEach(async () => {
  t = await testDatabase();
});
afterEach(() => t.close());

const configFor = (port: number) => ({
  host: '127.0.0.1',
  port,
  secure: false,
  user: undefined,
  password: undefined,
  from: 'Coilyard <post@coilyard.example>',
});

test('a mail of the outbox arrives at a real mail server, known by its outbox id', async () => {
  await enqueueMail(t.db, {
    kind: 'bid-received',
    to: { userId: null, email: 'buyer@anvil.example' },
    subject: 'A bid came in\r\nBcc: everyone@elsewhere.example',
    content: { heading: 'A bid', paragraphs: ['Ø 28 mm & more'] },
    about: { type: 'bid', id: '1' },
  });
  const mailer = createMailer(configFor(running.smtpPort));
  expect(await sendDueMails(t.db, (mail) => mailer.send(mail), { owner: 'test' })).toEqual({
    sent: 1,
    failed: 0,
  });
  mailer.close();
  const [row] = await t.db.select().from(outboxMail);
  expect(row).toMatchObject({ state: 'sent', attempts: 1, lastError: null });
  const box = z
    .array(
      z.object({ subject: z.string(), headers: z.record(z.string(), z.unknown()), to: z.array(z.unknown()) }),
    )
    .parse(await (await fetch(`${running.url}/api/email`)).json());
  expect(box).toHaveLength(1);
  expect(box[0]?.headers['message-id']).toBe(`<${row?.id}@coilyard.example>`);
  expect(box[0]?.subject).toBe('A bid came in Bcc: everyone@elsewhere.example');
  expect(box[0]?.to).toHaveLength(1);
});

test('the check of the mail server sends nothing and fails when there is none', async () => {
  const before = await (await fetch(`${running.url}/api/email`)).text();
  const mailer = createMailer(configFor(running.smtpPort));
  await mailer.check();
  mailer.close();
  expect(await (await fetch(`${running.url}/api/email`)).text()).toBe(before);
  const none = createMailer(configFor(1));
  await expect(none.check()).rejects.toThrow(/ECONNREFUSED/);
  none.close();
});
