import type { Actor } from '../../src/lib/domain/actor.ts';
import { openFindings } from '../../src/lib/domain/finding-answers.ts';
import { exampleRequirement } from '../../src/lib/induction/check/examples.ts';
import type { Requirement } from '../../src/lib/induction/check/types.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { resultOf } from '../../src/lib/server/checks/index.ts';
import type { Database } from '../../src/lib/server/db/index.ts';
import {
  answerFinding,
  checkDraft,
  createDraft,
  requestForUpdate,
  saveDraft,
} from '../../src/lib/server/requests/index.ts';
import { postRequest } from '../../src/lib/server/workflows/post-request.ts';

/** A draft of the example requirement with everything filled in, saved once. */
export async function aFullDraft(
  db: Database,
  engineer: Actor,
  companyId: string,
  change: { values?: Record<string, string>; requirement?: Requirement; title?: string } = {},
): Promise<{ id: string; number: number; version: number }> {
  const made = await createDraft(db, engineer, {
    companyId,
    commandId: newId(),
    from: {
      kind: 'requirement',
      requirement: change.requirement ?? exampleRequirement(),
      title: change.title ?? 'Coil for 40 mm shaft',
    },
  });
  const { form, machineId, machineVersion } = await requestForUpdate(db, made.id);
  const saved = await saveDraft(db, engineer, {
    requestId: made.id,
    version: made.version,
    form: {
      ...form,
      values: {
        ...form.values,
        'commercial.deliveryPlace': 'Works 2, gate B',
        'commercial.budget': '7777.77',
        'commercial.poNumber': 'PO-SECRET-41',
        'commercial.costCentre': 'CC-SECRET-42',
        ...change.values,
      },
    },
    machineId,
    machineVersion,
  });
  return { id: made.id, number: made.number, version: saved.version };
}

/** Checks a draft, answers what has to be answered, and posts it, all through the use-cases. */
export async function postDraft(db: Database, engineer: Actor, draft: { id: string; version: number }) {
  const check = await checkDraft(db, engineer, { requestId: draft.id, version: draft.version });
  const open = openFindings(resultOf(check.body).findings, check.answers);
  for (const finding of open.cautions) {
    await answerFinding(db, engineer, {
      requestId: draft.id,
      checkId: check.checkId,
      code: finding.code,
      subject: finding.subject,
      kind: 'acknowledged',
    });
  }
  return postRequest(db, engineer, { requestId: draft.id, version: draft.version, checkId: check.checkId });
}
