import { createServer, type Server } from 'node:net';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { startMailServer, type RunningMailServer } from '../../fake-services/mail/server.ts';
import { createMailer, MailError, type Mailer } from '../../src/lib/server/adapters/mailer.ts';

const configFor = (port: number) => ({
  host: '127.0.0.1',
  port,
  secure: false,
  user: undefined,
  password: undefined,
  from: 'Coilyard <post@coilyard.example>',
});
const mail = {
  messageId: '0199-0001',
  to: 'builder@copperfold.example',
  subject: 'Bid received · Ø 28 mm',
  text: 'Plain words',
  html: '<p>Marked words</p>',
};

const received = z.array(
  z.object({
    subject: z.string(),
    to: z.array(z.object({ address: z.string(), name: z.string() })),
    text: z.string(),
    html: z.string(),
    headers: z.record(z.string(), z.unknown()),
  }),
);

let running: RunningMailServer;
let mailer: Mailer;

beforeAll(async () => {
  running = await startMailServer({ smtpPort: 0, webPort: 0 });
  mailer = createMailer(configFor(running.smtpPort));
});

afterAll(async () => {
  mailer.close();
  await running.close();
});

const box = async () => received.parse(await (await fetch(`${running.url}/api/email`)).json());

describe('the mailer', () => {
  it('sends text and HTML under the Message-ID it was given', async () => {
    await mailer.send(mail);
    const [got] = await box();
    expect(got?.headers['message-id']).toBe('<0199-0001@coilyard.example>');
    expect(got?.subject).toBe(mail.subject);
    expect(got?.to).toEqual([{ address: mail.to, name: '' }]);
    expect(got?.text.trim()).toBe('Plain words');
    expect(got?.html).toContain('<p>Marked words</p>');
    expect(got?.headers['auto-submitted']).toBe('auto-generated');
  });

  it.each([
    ['a list', 'a@x.example, b@x.example'],
    ['a name', 'Builder <builder@copperfold.example>'],
    ['a line break', 'a@x.example\r\nBcc: b@x.example'],
  ])('refuses %s as recipient', async (_what, to) => {
    await expect(mailer.send({ ...mail, to })).rejects.toThrow();
    expect((await box()).every((got) => got.to.length === 1 && got.to[0]?.address === mail.to)).toBe(true);
  });

  it('refuses a subject with a line break', async () => {
    await expect(mailer.send({ ...mail, subject: 'Hello\r\nBcc: x@y.example' })).rejects.toThrow('one line');
  });

  it('reports a server that is not there as something to try again', async () => {
    const closed = createMailer(configFor(1));
    await expect(closed.send(mail)).rejects.toMatchObject({ name: 'MailError', permanent: false });
    closed.close();
  });

  it('tells a refusal for good from one for now', async () => {
    for (const [reply, permanent] of [
      ['550 no such user', true],
      ['451 try later', false],
    ] as const) {
      const server: Server = createServer((socket) => {
        socket.write('220 ready\r\n');
        socket.on('data', (data) => {
          const line = data.toString();
          if (line.startsWith('RCPT')) socket.write(`${reply}\r\n`);
          else if (line.startsWith('QUIT')) socket.end('221 bye\r\n');
          else socket.write('250 ok\r\n');
        });
        socket.on('error', () => undefined);
      });
      await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
      const address = server.address();
      const strict = createMailer(
        configFor(typeof address === 'object' && address !== null ? address.port : 0),
      );
      const error: unknown = await strict.send(mail).catch((caught: unknown) => caught);
      expect(error).toBeInstanceOf(MailError);
      expect(error).toMatchObject({ permanent });
      strict.close();
      await new Promise((resolve) => server.close(resolve));
    }
  });
});
