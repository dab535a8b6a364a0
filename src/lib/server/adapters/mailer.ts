import { createTransport } from 'nodemailer';
import { z } from 'zod';

export interface MailerConfig {
  host: string;
  port: number;
  secure: boolean;
  user: string | undefined;
  password: string | undefined;
  /** `Name <address>` or a plain address. */
  from: string;
}

export interface OutgoingMail {
  /** The outbox id; becomes the Message-ID, so that a mail sent twice is recognised. */
  messageId: string;
  /** One plain address: no name, no list. */
  to: string;
  subject: string;
  text: string;
  html: string;
}

export interface Mailer {
  send: (mail: OutgoingMail) => Promise<void>;
  /** Connects, greets and signs in without sending; throws when that fails. */
  check: () => Promise<void>;
  close: () => void;
}

/** The mail was not taken. `permanent` when the server refused it for good (SMTP 5xx). */
export class MailError extends Error {
  readonly permanent: boolean;

  constructor(message: string, permanent: boolean, cause?: unknown) {
    super(message, { cause });
    this.name = 'MailError';
    this.permanent = permanent;
  }
}

const noLineBreak = (value: string): boolean => !/[\r\n]/.test(value);

const mailSchema = z.object({
  messageId: z.string().regex(/^[\w.@-]+$/, 'must be one word'),
  to: z.email('must be one plain address'),
  subject: z.string().min(1).max(998).refine(noLineBreak, 'must be one line'),
  text: z.string(),
  html: z.string(),
});

const sentSchema = z.object({ accepted: z.array(z.unknown()), rejected: z.array(z.unknown()) });
const smtpErrorSchema = z.object({ responseCode: z.number() });

function messageIdOf(id: string, from: string): string {
  if (id.includes('@')) return `<${id}>`;
  const domain = /@([^>\s]+)>?\s*$/.exec(from)?.[1] ?? 'localhost';
  return `<${id}@${domain}>`;
}

/** Sends mail by SMTP. Throws MailError when the server did not take the mail. */
export function createMailer(config: MailerConfig): Mailer {
  const transport = createTransport({
    host: config.host,
    port: config.port,
    secure: config.secure,
    // A server on this machine speaks plain SMTP; elsewhere STARTTLS is required.
    ...(config.secure ? {} : isLocal(config.host) ? { ignoreTLS: true } : { requireTLS: true }),
    ...(config.user === undefined ? {} : { auth: { user: config.user, pass: config.password ?? '' } }),
    connectionTimeout: 10_000,
    greetingTimeout: 10_000,
    socketTimeout: 30_000,
    disableFileAccess: true,
    disableUrlAccess: true,
  });
  return {
    send: async (given) => {
      const mail = mailSchema.parse(given);
      let sent: unknown;
      try {
        sent = await transport.sendMail({
          from: config.from,
          to: { name: '', address: mail.to },
          subject: mail.subject,
          text: mail.text,
          html: mail.html,
          messageId: messageIdOf(mail.messageId, config.from),
          headers: { 'Auto-Submitted': 'auto-generated' },
        });
      } catch (error) {
        const parsed = smtpErrorSchema.safeParse(error);
        const permanent = parsed.success && parsed.data.responseCode >= 500;
        throw new MailError(error instanceof Error ? error.message : String(error), permanent, error);
      }
      if (sentSchema.parse(sent).accepted.length !== 1)
        throw new MailError('The mail server refused the recipient.', true);
    },
    check: async () => {
      await transport.verify();
    },
    close: () => transport.close(),
  };
}

function isLocal(host: string): boolean {
  return host === 'localhost' || host === '127.0.0.1' || host === '::1';
}
