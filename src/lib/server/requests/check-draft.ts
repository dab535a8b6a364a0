import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { FindingAnswer } from '../../domain/finding-answers.ts';
import type { Requirement } from '../../induction/check/types.ts';
import { methodVersion } from '../../induction/version.ts';
import type { AnswerFinding } from '../../schemas/api/draft.ts';
import { requireAccess } from '../access/index.ts';
import {
  answersOf,
  checkBody,
  checkById,
  latestCheck,
  limitChecks,
  requirementKey,
  runCheck,
  storeCheck,
  unsafeAnswerFinding,
  type CheckRow,
  type CheckRun,
} from '../checks/index.ts';
import { transact, type Database, type Reader } from '../db/index.ts';
import { requestForUpdate } from './queries.ts';

export interface DraftCheck {
  checkId: string;
  requestVersion: number;
  methodVersion: string;
  createdAt: number;
  answers: FindingAnswer[];
  /** The result's JSON as stored. */
  body: string;
}

async function view(reader: Reader, row: CheckRow, body: string): Promise<DraftCheck> {
  return {
    checkId: row.id,
    requestVersion: row.requestVersion ?? 0,
    methodVersion: row.methodVersion,
    createdAt: row.createdAt,
    answers: await answersOf(reader, row.id),
    body,
  };
}

/** The request's newest check, where it is of this very requirement by this very method. */
async function storedRun(
  reader: Reader,
  requestId: string,
  requirement: Requirement,
): Promise<CheckRun | undefined> {
  const latest = await latestCheck(reader, requestId);
  const { text, hash } = requirementKey(requirement);
  if (
    latest?.requirementHash !== hash ||
    latest.methodVersion !== methodVersion ||
    latest.setting !== 'default' ||
    latest.state !== 'done'
  ) {
    return undefined;
  }
  return {
    requirementText: text,
    requirementHash: hash,
    setting: 'default',
    methodVersion,
    body: await checkBody(reader, latest.id),
  };
}

function staleDraft(version: number): AppError {
  return new AppError('version-conflict', {
    detail: 'The draft was saved again in the meantime.',
    data: { version },
  });
}

/**
 * The check that counts: run by the server on exactly this version of the draft, and stored. The
 * solving happens outside the transaction; a draft that moved on meanwhile is a conflict.
 */
export async function checkDraft(
  db: Database,
  actor: Actor,
  input: { requestId: string; version: number },
): Promise<DraftCheck> {
  const row = await requestForUpdate(db, input.requestId);
  requireAccess(actor, 'request.edit', { companyId: row.companyId });
  if (row.state !== 'draft') {
    throw new AppError('state-conflict', { detail: 'This request is posted; its check is frozen with it.' });
  }
  if (row.version !== input.version) throw staleDraft(row.version);
  if (row.requirement === null) {
    throw new AppError('invalid-input', { detail: 'The requirement is not complete yet.' });
  }
  await limitChecks(db, { userId: actor.userId });
  const run = (await storedRun(db, row.id, row.requirement)) ?? (await runCheck(row.requirement, 'default'));
  return transact(db, async (tx) => {
    const now = await requestForUpdate(tx, input.requestId);
    if (now.state !== 'draft' || now.version !== input.version) throw staleDraft(now.version);
    const stored = await storeCheck(tx, run, {
      companyId: row.companyId,
      requestId: row.id,
      requestVersion: input.version,
      userId: actor.userId,
    });
    return view(tx, stored, run.body);
  });
}

/** Acknowledges a caution, or carries a blocker by name and reason, on the newest check of a draft. */
export async function answerFinding(
  db: Database,
  actor: Actor,
  input: AnswerFinding & { requestId: string },
): Promise<FindingAnswer[]> {
  return transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.edit', { companyId: row.companyId });
    if (row.state !== 'draft') {
      throw new AppError('state-conflict', {
        detail: 'This request is posted; its findings are frozen with it.',
      });
    }
    const check = await checkById(tx, input.checkId);
    if (check?.requestId !== row.id) throw new AppError('not-found');
    if (check.requestVersion !== row.version) throw staleDraft(row.version);
    await unsafeAnswerFinding(
      tx,
      actor,
      check,
      { code: input.code, subject: input.subject },
      input.kind === 'carried' ? { kind: 'carried', reason: input.reason } : { kind: 'acknowledged' },
    );
    return answersOf(tx, check.id);
  });
}
