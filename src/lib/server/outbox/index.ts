import { and, asc, eq, inArray, lte, or, sql } from 'drizzle-orm';
import { businessNow, realNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { config } from '../config/index.ts';
import type { Database, Tx } from '../db/index.ts';
import { notification, outboxMail } from '../db/schema/platform.ts';
import { backoffMs } from '../jobs/backoff.ts';
import { log } from '../log/index.ts';
import { mailContent, openContent, sealContent, type MailContent } from './content.ts';
import { renderHtml, renderText } from './render.ts';

export type { MailContent };

export interface Recipient {
  userId: string | null;
  email: string;
}

export interface MailInput {
  /** kebab-case name of the event, e.g. `bid-received`. */
  kind: string;
  to: Recipient;
  subject: string;
  content: MailContent;
  about: { type: string; id: string };
  /** The same key is sent once. */
  dedupeKey?: string;
  /** Carries a single-use token: encrypted at rest, erased after sending, never shown to admins. */
  secret?: boolean;
}

/** Header text never carries line breaks. */
function oneLine(text: string): string {
  return text.replace(/[\r\n\u2028\u2029]+/g, ' ').trim();
}

/** Writes a mail to the outbox, in the transaction of the event it tells about. */
export async function enqueueMail(tx: Tx | Database, mail: MailInput): Promise<void> {
  const now = realNow();
  await tx
    .insert(outboxMail)
    .values({
      id: newId(),
      kind: mail.kind,
      toUserId: mail.to.userId,
      toEmail: oneLine(mail.to.email),
      subject: oneLine(mail.subject),
      body: mail.secret ? sealContent(mail.content, config().mailKey) : JSON.stringify(mail.content),
      secret: mail.secret ?? false,
      runAt: now,
      createdAt: now,
      dedupeKey: mail.dedupeKey ?? null,
      subjectType: mail.about.type,
      subjectId: mail.about.id,
    })
    .onConflictDoNothing();
}

/** A mail and the same as a notification in the app, for each recipient. */
export async function notify(
  tx: Tx,
  recipients: readonly Recipient[],
  event: Omit<MailInput, 'to' | 'secret'> & { href: string },
): Promise<void> {
  const at = await businessNow(tx);
  for (const to of recipients) {
    await enqueueMail(tx, {
      ...event,
      to,
      ...(event.dedupeKey ? { dedupeKey: `${event.dedupeKey}/${to.email}` } : {}),
    });
    if (to.userId) {
      await tx.insert(notification).values({
        id: newId(),
        userId: to.userId,
        kind: event.kind,
        title: event.subject,
        href: event.href,
        at,
      });
    }
  }
}

/** What sends: the mailer adapter, or a test's own. Throws when the mail was not taken. */
export type SendMail = (mail: {
  /** The outbox id, as the Message-ID: a mail sent twice is known by it. */
  messageId: string;
  to: string;
  subject: string;
  text: string;
  html: string;
}) => Promise<void>;

const leaseMs = 60_000;
const maxAttempts = 16;

async function claimMails(db: Database, owner: string, limit: number) {
  const now = realNow();
  const due = db
    .select({ id: outboxMail.id })
    .from(outboxMail)
    .where(
      or(
        and(eq(outboxMail.state, 'queued'), lte(outboxMail.runAt, now)),
        and(eq(outboxMail.state, 'sending'), lte(outboxMail.leaseUntil, now)),
      ),
    )
    .orderBy(asc(outboxMail.runAt), asc(outboxMail.id))
    .limit(limit);
  return db
    .update(outboxMail)
    .set({
      state: 'sending',
      leaseOwner: owner,
      leaseUntil: now + leaseMs,
      attempts: sql`${outboxMail.attempts} + 1`,
    })
    .where(inArray(outboxMail.id, due))
    .returning();
}

/**
 * Sends what is due, oldest first, and tells how many were sent. Acknowledged after sending: a crash in
 * between may send a mail twice (with the same Message-ID), never zero times. Stops at the first
 * failure of the server, so that a dead server is not hammered.
 */
export async function sendDueMails(
  db: Database,
  send: SendMail,
  options: { owner: string; limit?: number; signal?: AbortSignal },
): Promise<{ sent: number; failed: number }> {
  const { origin } = { origin: config().origin };
  const rows = (await claimMails(db, options.owner, options.limit ?? 20)).sort((a, b) =>
    a.id < b.id ? -1 : 1,
  );
  let sent = 0;
  let failed = 0;
  const release = (ids: string[]) =>
    ids.length === 0
      ? Promise.resolve()
      : db
          .update(outboxMail)
          .set({
            state: 'queued',
            leaseOwner: null,
            leaseUntil: null,
            attempts: sql`${outboxMail.attempts} - 1`,
          })
          .where(and(inArray(outboxMail.id, ids), eq(outboxMail.leaseOwner, options.owner)));
  for (const [index, row] of rows.entries()) {
    if (options.signal?.aborted || failed > 0) {
      await release(rows.slice(index).map((r) => r.id));
      break;
    }
    try {
      const content = row.secret
        ? openContent(row.body, config().mailKey)
        : mailContent.parse(JSON.parse(row.body));
      await send({
        messageId: row.id,
        to: row.toEmail,
        subject: row.subject,
        text: renderText(content, origin),
        html: renderHtml(content, origin),
      });
      await db
        .update(outboxMail)
        .set({
          state: 'sent',
          sentAt: realNow(),
          leaseOwner: null,
          leaseUntil: null,
          lastError: null,
          ...(row.secret ? { body: '' } : {}),
        })
        .where(eq(outboxMail.id, row.id));
      sent += 1;
    } catch (error) {
      failed += 1;
      const message = error instanceof Error ? error.message : String(error);
      const dead = row.attempts >= maxAttempts;
      log().warn(
        { mail: row.id, kind: row.kind, attempt: row.attempts, dead, error: message },
        'mail not sent',
      );
      await db
        .update(outboxMail)
        .set({
          state: dead ? 'dead' : 'queued',
          runAt: realNow() + backoffMs(row.attempts, Math.random()),
          leaseOwner: null,
          leaseUntil: null,
          lastError: message.slice(0, 500),
        })
        .where(eq(outboxMail.id, row.id));
    }
  }
  return { sent, failed };
}
