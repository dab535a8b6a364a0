import { asc, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { answerTo, mayCarry, type FindingAnswer } from '../../domain/finding-answers.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import type { Reader, Tx } from '../db/index.ts';
import { checkAcknowledgement } from '../db/schema/checks.ts';
import { resultOf } from './run-check.ts';
import { checkBody, type CheckRow } from './store-check.ts';

/** The answers given to a check's findings so far. */
export async function answersOf(reader: Reader, checkId: string): Promise<FindingAnswer[]> {
  return reader
    .select({
      code: checkAcknowledgement.code,
      subject: checkAcknowledgement.subject,
      kind: checkAcknowledgement.kind,
      name: checkAcknowledgement.name,
      reason: checkAcknowledgement.reason,
      at: checkAcknowledgement.at,
    })
    .from(checkAcknowledgement)
    .where(eq(checkAcknowledgement.checkId, checkId))
    .orderBy(asc(checkAcknowledgement.at), asc(checkAcknowledgement.id));
}

export interface FindingName {
  code: string;
  subject: string;
}

/**
 * Writes an answer to one finding of a check, for callers who have authorised it. Notes need none; a
 * blocker is carried with a reason, unless it is a safety matter.
 */
export async function unsafeAnswerFinding(
  tx: Tx,
  actor: Actor,
  checkRow: CheckRow,
  finding: FindingName,
  answer: { kind: 'acknowledged' } | { kind: 'carried'; reason: string },
): Promise<void> {
  const found = resultOf(await checkBody(tx, checkRow.id)).findings.find(
    (one) => one.code === finding.code && one.subject === finding.subject,
  );
  if (!found) throw new AppError('not-found', { detail: 'This check has no such finding.' });
  if (answer.kind === 'acknowledged' && found.severity === 'blocker') {
    throw new AppError('state-conflict', { detail: 'A blocker is mended or carried, not acknowledged.' });
  }
  if (answer.kind === 'carried' && !mayCarry(found)) {
    throw new AppError('state-conflict', {
      detail: found.safety
        ? 'This is a safety matter: it cannot be carried and has to be mended.'
        : 'Only a blocker is carried.',
    });
  }
  if (answerTo(finding, await answersOf(tx, checkRow.id))) return;
  await tx.insert(checkAcknowledgement).values({
    id: newId(),
    checkId: checkRow.id,
    code: finding.code,
    subject: finding.subject,
    kind: answer.kind,
    name: actor.name,
    reason: answer.kind === 'carried' ? answer.reason : '',
    userId: actor.userId,
    at: await businessNow(tx),
  });
  await audit(tx, actor, {
    action: answer.kind === 'carried' ? 'finding.carry' : 'finding.acknowledge',
    subjectType: 'check',
    subjectId: checkRow.id,
    companyId: checkRow.companyId,
    detail: { ...finding, ...(answer.kind === 'carried' ? { reason: answer.reason } : {}) },
  });
}
