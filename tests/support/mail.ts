import type { Database } from '../../src/lib/server/db/index.ts';
import { sendDueMails } from '../../src/lib/server/outbox/index.ts';

export interface ReceivedMail {
  messageId: string;
  to: string;
  subject: string;
  text: string;
  html: string;
}

/** Sends what waits in the outbox to a list instead of a server. */
export async function drainMails(db: Database): Promise<ReceivedMail[]> {
  const mails: ReceivedMail[] = [];
  const send = (mail: ReceivedMail) => {
    mails.push(mail);
    return Promise.resolve();
  };
  while ((await sendDueMails(db, send, { owner: 'test', limit: 100 })).sent > 0);
  return mails;
}

/** The own path that a mail leads to. */
export function pathIn(mail: ReceivedMail | undefined): URL {
  const match = /https?:\/\/\S+/.exec(mail?.text ?? '');
  if (!match) throw new Error(`no link in the mail “${mail?.subject ?? 'none'}”`);
  return new URL(match[0]);
}
