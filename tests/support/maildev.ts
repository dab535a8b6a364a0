import { z } from 'zod';

const listSchema = z.array(
  z.object({
    id: z.string(),
    subject: z.string().default(''),
    to: z.array(z.object({ address: z.string() })),
    text: z.string().default(''),
    html: z.string().default(''),
    headers: z.record(z.string(), z.unknown()).default({}),
  }),
);

export interface ReceivedMail {
  id: string;
  subject: string;
  to: string;
  text: string;
  html: string;
  headers: Record<string, unknown>;
  /** Addresses in the plain text, in order. */
  links: string[];
}

/** All mails that have arrived, oldest first. */
export async function readMails(mailUrl: string): Promise<ReceivedMail[]> {
  const response = await fetch(`${mailUrl}/api/email`);
  return listSchema.parse(await response.json()).flatMap((mail) =>
    mail.to.map(({ address }) => ({
      id: mail.id,
      subject: mail.subject,
      to: address.toLowerCase(),
      text: mail.text,
      html: mail.html,
      headers: mail.headers,
      links: [...mail.text.matchAll(/https?:\/\/[^\s<>"]+/g)].map((match) => match[0]),
    })),
  );
}

export interface MailQuery {
  to: string;
  subject?: string | RegExp;
  /** Leave out mails with these ids: those that were there before. */
  notIn?: string[];
  timeoutMs?: number;
}

/** The newest mail that fits, as soon as there is one. */
export async function waitForMailAt(mailUrl: string, query: MailQuery): Promise<ReceivedMail> {
  const deadline = Date.now() + (query.timeoutMs ?? 20_000);
  const to = query.to.toLowerCase();
  const { subject } = query;
  const fits = (mail: ReceivedMail) =>
    mail.to === to &&
    query.notIn?.includes(mail.id) !== true &&
    (subject === undefined ||
      (typeof subject === 'string' ? mail.subject.includes(subject) : subject.test(mail.subject)));
  for (;;) {
    const mails = await readMails(mailUrl);
    const found = mails.filter(fits).at(-1);
    if (found !== undefined) return found;
    if (Date.now() > deadline) {
      const there = mails.filter((mail) => mail.to === to).map((mail) => mail.subject);
      throw new Error(
        `No mail to ${query.to} with subject ${String(subject)}; there are: ${there.join(' | ') || 'none'}`,
      );
    }
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
}
