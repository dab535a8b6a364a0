import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact, type Database } from '../db/index.ts';
import { question } from '../db/schema/requests.ts';
import { questionById, requestForUpdate } from '../requests/index.ts';
import { interestedCompanies } from './interested-companies.ts';

export interface AskQuestionInput {
  requestId: string;
  companyId: string;
  commandId: string;
  kind: 'clarification' | 'proposal';
  text: string;
}

/** Asks the buyer of an open request: a clarification for all bidders' eyes, or a proposal for the buyer's. */
export async function askQuestion(
  db: Database,
  actor: Actor,
  input: AskQuestionInput,
): Promise<{ id: string }> {
  return transact(db, async (tx) => {
    requireAccess(actor, 'question.ask', { companyId: input.companyId });
    requireVerifiedEmail(actor);
    const row = await requestForUpdate(tx, input.requestId);
    const now = await businessNow(tx);
    if (row.state === 'draft' || actor.memberships.some((m) => m.companyId === row.companyId)) {
      throw new AppError('not-found');
    }
    if (row.state !== 'posted' || (row.closesAt ?? 0) <= now) {
      throw new AppError('state-conflict', { detail: 'Questions are taken while bids are open.' });
    }
    const [existing] = await tx
      .select({ id: question.id, companyId: question.companyId })
      .from(question)
      .where(eq(question.commandId, input.commandId));
    if (existing) {
      if (existing.companyId !== input.companyId) throw new AppError('already-exists');
      return { id: existing.id };
    }
    const id = newId();
    await tx.insert(question).values({
      id,
      requestId: row.id,
      companyId: input.companyId,
      kind: input.kind,
      text: input.text,
      askedBy: actor.userId,
      askedAt: now,
      commandId: input.commandId,
    });
    await audit(tx, actor, {
      action: 'question.ask',
      subjectType: 'request',
      subjectId: row.id,
      companyId: input.companyId,
      detail: { questionId: id, kind: input.kind },
    });
    await notifyCompany(tx, row.companyId, ['engineer', 'purchaser'], {
      kind: 'question-asked',
      subject: `${input.kind === 'proposal' ? 'Proposal' : 'Question'} on R-${row.number} “${row.title}”`,
      content: {
        heading: input.kind === 'proposal' ? 'A bidder proposes something' : 'A bidder asks',
        paragraphs: [
          input.text,
          input.kind === 'proposal'
            ? 'Only you see this proposal; your answer goes to this bidder alone.'
            : 'All bidders will see the question with your answer, without the asker’s name.',
        ],
        action: { label: 'Answer', path: `/requests/${row.id}#questions` },
      },
      about: { type: 'question', id },
      href: `/requests/${row.id}#questions`,
      dedupeKey: `question-asked/${id}`,
    });
    return { id };
  });
}

/** Answers a question once; a clarification goes to everyone who bids or asked, a proposal to its bidder. */
export async function answerQuestion(
  db: Database,
  actor: Actor,
  input: { questionId: string; version: number; answer: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const asked = await questionById(tx, input.questionId);
    const row = await requestForUpdate(tx, asked.requestId);
    requireAccess(actor, 'question.answer', { companyId: row.companyId });
    if (asked.answeredAt !== null) {
      throw new AppError('state-conflict', { detail: 'This question is answered already.' });
    }
    if (asked.version !== input.version) throw new AppError('version-conflict');
    const now = await businessNow(tx);
    await tx
      .update(question)
      .set({ answer: input.answer, answeredBy: actor.userId, answeredAt: now, version: asked.version + 1 })
      .where(and(eq(question.id, asked.id), eq(question.version, input.version)));
    await audit(tx, actor, {
      action: 'question.answer',
      subjectType: 'request',
      subjectId: row.id,
      companyId: row.companyId,
      detail: { questionId: asked.id },
    });
    const told = asked.kind === 'proposal' ? [asked.companyId] : await interestedCompanies(tx, row.id);
    for (const companyId of told) {
      await notifyCompany(tx, companyId, ['estimator'], {
        kind: 'question-answered',
        subject: `Answer on request “${row.title}”`,
        content: {
          heading: `The buyer has answered on “${row.title}”`,
          paragraphs: [],
          facts: [
            [asked.kind === 'proposal' ? 'Your proposal' : 'Question', asked.text],
            ['Answer', input.answer],
          ],
          action: { label: 'See the request', path: `/requests/${row.id}#questions` },
        },
        about: { type: 'question', id: asked.id },
        href: `/requests/${row.id}#questions`,
        dedupeKey: `question-answered/${asked.id}/${companyId}`,
      });
    }
  });
}
