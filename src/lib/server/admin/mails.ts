import { and, asc, count, desc, eq, gt, lt } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { mailMachine, type HandEvent, type MailState } from '../../domain/delivery.ts';
import { AppError } from '../../domain/errors.ts';
import { nextState } from '../../domain/transitions.ts';
import { requireAccess } from '../access/index.ts';
import { realNow } from '../adapters/clock.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { outboxMail } from '../db/schema/platform.ts';
import { mailContent } from '../outbox/content.ts';
import { renderText } from '../outbox/render.ts';

const pageSize = 50;

// The body is not among them: lists never need it, and secret ones are nobody's to read.
const listColumns = {
  id: outboxMail.id,
  kind: outboxMail.kind,
  toEmail: outboxMail.toEmail,
  subject: outboxMail.subject,
  secret: outboxMail.secret,
  state: outboxMail.state,
  attempts: outboxMail.attempts,
  runAt: outboxMail.runAt,
  lastError: outboxMail.lastError,
  subjectType: outboxMail.subjectType,
  subjectId: outboxMail.subjectId,
  createdAt: outboxMail.createdAt,
  sentAt: outboxMail.sentAt,
};

/** Mails by state or by what they are about, newest first. */
export async function listMails(
  db: Database,
  actor: Actor,
  filter: { state: MailState | null; about: string | null; after: string | null },
) {
  requireAccess(actor, 'admin.operate');
  const rows = await db
    .select(listColumns)
    .from(outboxMail)
    .where(
      and(
        ...(filter.state ? [eq(outboxMail.state, filter.state)] : []),
        ...(filter.about ? [eq(outboxMail.subjectId, filter.about)] : []),
        ...(filter.after ? [lt(outboxMail.id, filter.after)] : []),
      ),
    )
    .orderBy(desc(outboxMail.id))
    .limit(pageSize + 1);
  const items = rows.slice(0, pageSize);
  return { items, next: rows.length > pageSize ? (items.at(-1)?.id ?? null) : null };
}

/** How many mails are in each state. */
export async function mailCounts(db: Database, actor: Actor): Promise<Record<MailState, number>> {
  requireAccess(actor, 'admin.view');
  const counts: Record<MailState, number> = { queued: 0, sending: 0, sent: 0, dead: 0, parked: 0 };
  const rows = await db
    .select({ state: outboxMail.state, n: count() })
    .from(outboxMail)
    .groupBy(outboxMail.state);
  for (const row of rows) counts[row.state] = row.n;
  return counts;
}

/** One mail. What carries a single-use token has no text for anyone here. */
export async function mailFor(db: Database, actor: Actor, id: string) {
  requireAccess(actor, 'admin.operate');
  const [row] = await db
    .select({ ...listColumns, body: outboxMail.body })
    .from(outboxMail)
    .where(eq(outboxMail.id, id));
  if (!row) throw new AppError('not-found');
  const { body, ...facts } = row;
  if (facts.secret || body === '') return { ...facts, text: null };
  const content = mailContent.safeParse(JSON.parse(body));
  return { ...facts, text: content.success ? renderText(content.data, '') : null };
}

/** Sends a dead or parked mail again, or puts one aside; both are told in the audit trail. */
export async function handleMail(db: Database, actor: Actor, id: string, event: HandEvent): Promise<void> {
  requireAccess(actor, 'admin.operate');
  await transact(db, async (tx) => {
    const [row] = await tx
      .select({
        state: outboxMail.state,
        kind: outboxMail.kind,
        secret: outboxMail.secret,
        body: outboxMail.body,
      })
      .from(outboxMail)
      .where(eq(outboxMail.id, id));
    if (!row) throw new AppError('not-found');
    const to = nextState(mailMachine, row.state, event);
    if (!to) throw new AppError('state-conflict', { detail: `The mail is ${row.state} meanwhile.` });
    const result = await tx
      .update(outboxMail)
      .set({
        state: to,
        leaseOwner: null,
        leaseUntil: null,
        ...(event === 'retry' ? { attempts: 0, runAt: realNow() } : {}),
      })
      .where(and(eq(outboxMail.id, id), eq(outboxMail.state, row.state)));
    if (result.rowsAffected !== 1) throw new AppError('version-conflict');
    await audit(tx, actor, {
      action: `mail.${event}`,
      subjectType: 'mail',
      subjectId: id,
      detail: { kind: row.kind, from: row.state, to },
    });
  });
}

/** Since when the oldest mail that is due has been waiting; null when none is. */
export async function oldestDueMail(db: Database): Promise<number | null> {
  const now = realNow();
  const [row] = await db
    .select({ runAt: outboxMail.runAt })
    .from(outboxMail)
    .where(and(eq(outboxMail.state, 'queued'), gt(outboxMail.runAt, 0), lt(outboxMail.runAt, now)))
    .orderBy(asc(outboxMail.runAt))
    .limit(1);
  return row?.runAt ?? null;
}
