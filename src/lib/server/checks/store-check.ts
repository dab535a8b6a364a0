import { and, desc, eq } from 'drizzle-orm';
import type { Finding, Severity } from '../../induction/check/types.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Reader, Tx } from '../db/index.ts';
import { check, checkResult } from '../db/schema/checks.ts';
import { resultOf, type CheckRun } from './run-check.ts';

export type CheckRow = typeof check.$inferSelect;

const countOf = (findings: readonly Finding[], severity: Severity) =>
  findings.filter((finding) => finding.severity === severity).length;

/**
 * Keeps a check of a draft. Where the newest check of the request is of the very same requirement,
 * setting and method, that one is kept and only takes the draft's new version: what was acknowledged
 * stays acknowledged as long as the technical side does not change.
 */
export async function storeCheck(
  tx: Tx,
  run: CheckRun,
  about: { companyId: string; requestId: string; requestVersion: number; userId: string },
): Promise<CheckRow> {
  const latest = await latestCheck(tx, about.requestId);
  if (
    latest?.requirementHash === run.requirementHash &&
    latest.setting === run.setting &&
    latest.methodVersion === run.methodVersion &&
    latest.state === 'done'
  ) {
    const [row] = await tx
      .update(check)
      .set({ requestVersion: about.requestVersion })
      .where(eq(check.id, latest.id))
      .returning();
    return row ?? latest;
  }
  const { findings } = resultOf(run.body);
  const [row] = await tx
    .insert(check)
    .values({
      id: newId(),
      companyId: about.companyId,
      requestId: about.requestId,
      requestVersion: about.requestVersion,
      requirementHash: run.requirementHash,
      requirement: run.requirementText,
      methodVersion: run.methodVersion,
      setting: run.setting,
      state: 'done',
      blockers: countOf(findings, 'blocker'),
      cautions: countOf(findings, 'caution'),
      notes: countOf(findings, 'note'),
      createdAt: await businessNow(tx),
      createdBy: about.userId,
    })
    .returning();
  if (!row) throw new Error('the check was not written');
  await tx.insert(checkResult).values({ checkId: row.id, body: run.body });
  return row;
}

export async function latestCheck(reader: Reader, requestId: string): Promise<CheckRow | undefined> {
  const [row] = await reader
    .select()
    .from(check)
    .where(and(eq(check.requestId, requestId)))
    .orderBy(desc(check.createdAt), desc(check.id))
    .limit(1);
  return row;
}

export async function checkById(reader: Reader, id: string): Promise<CheckRow | undefined> {
  const [row] = await reader.select().from(check).where(eq(check.id, id));
  return row;
}

/** The result's JSON as stored. */
export async function checkBody(reader: Reader, checkId: string): Promise<string> {
  const [row] = await reader
    .select({ body: checkResult.body })
    .from(checkResult)
    .where(eq(checkResult.checkId, checkId));
  if (!row) throw new Error(`check ${checkId} has no result`);
  return row.body;
}
