import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { openFindings } from '../../../src/lib/domain/finding-answers.ts';
import { exampleRequirement } from '../../../src/lib/induction/check/examples.ts';
import type { Requirement } from '../../../src/lib/induction/check/types.ts';
import { closeSolvePool, resultOf, sha256Hex } from '../../../src/lib/server/checks/index.ts';
import { checkAcknowledgement } from '../../../src/lib/server/db/schema/checks.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import { specification } from '../../../src/lib/server/db/schema/requests.ts';
import {
  answerFinding,
  checkDraft,
  readSpecification,
  requestForUpdate,
  saveDraft,
  specificationOf,
} from '../../../src/lib/server/requests/index.ts';
import { postRequest } from '../../../src/lib/server/workflows/post-request.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aFullDraft, postDraft } from '../../support/drafts.ts';
import { aCompany, aMember } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let test: TestDatabase;
let companyId: string;
let engineer: Actor;
let purchaser: Actor;
let technician: Actor;
let outsider: Actor;
let fabricator: Actor;

beforeEach(async () => {
  test = await testDatabase();
  companyId = await aCompany(test.db, 'buyer');
  engineer = await aMember(test.db, companyId, ['engineer'], { name: 'Process engineer' });
  purchaser = await aMember(test.db, companyId, ['purchaser']);
  technician = await aMember(test.db, companyId, ['technician']);
  outsider = await aMember(test.db, await aCompany(test.db, 'buyer'), ['owner']);
  fabricator = await aMember(test.db, await aCompany(test.db, 'fabricator', { verified: true }), ['owner']);
});
afterEach(() => test.close());
afterAll(() => closeSolvePool());

const strangers = () => [
  { actor: purchaser, code: 'not-allowed' },
  { actor: technician, code: 'not-allowed' },
  { actor: outsider, code: 'not-found' },
  { actor: fabricator, code: 'not-found' },
];

/** The example with a supply range that its fitted setting misses: something to acknowledge or mend. */
function troubled(): Requirement {
  const requirement = exampleRequirement();
  requirement.machine.supply.ratedPower = null;
  requirement.machine.supply.frequencyMin = null;
  requirement.machine.supply.frequencyMax = null;
  return requirement;
}

describe('a blocker', () => {
  /** No handing: the coil could be mounted the wrong way round. */
  function unhanded(): Requirement {
    const requirement = exampleRequirement();
    requirement.coil.handing.windingDirection = null;
    return requirement;
  }

  it('keeps the draft from being posted until it is carried by name and reason, which bidders read', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId, { requirement: unhanded() });
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const blocker = resultOf(stored.body).findings.find((one) => one.code === 'handing-missing');
    expect(blocker?.severity).toBe('blocker');
    if (!blocker) return;
    const post = () =>
      postRequest(test.db, engineer, {
        requestId: draft.id,
        version: draft.version,
        checkId: stored.checkId,
      });
    expect(await refusalCode(post())).toBe('state-conflict');
    const answer = {
      requestId: draft.id,
      checkId: stored.checkId,
      code: blocker.code,
      subject: blocker.subject,
    };
    expect(await refusalCode(answerFinding(test.db, engineer, { ...answer, kind: 'acknowledged' }))).toBe(
      'state-conflict',
    );
    await answerFinding(test.db, engineer, {
      ...answer,
      kind: 'carried',
      reason: 'The handing is agreed with the shop when the bid is in.',
    });
    for (const caution of openFindings(resultOf(stored.body).findings, []).cautions) {
      await answerFinding(test.db, engineer, {
        requestId: draft.id,
        checkId: stored.checkId,
        code: caution.code,
        subject: caution.subject,
        kind: 'acknowledged',
      });
    }
    await post();
    const frozen = readSpecification((await specificationOf(test.db, draft.id))?.body ?? '');
    expect(frozen.answers).toContainEqual(
      expect.objectContaining({ kind: 'carried', name: 'Process engineer', code: 'handing-missing' }),
    );
  });

  it('that is a safety matter cannot be carried', async () => {
    const requirement = exampleRequirement();
    // A part wider than the opening: it would touch the live coil.
    requirement.part.outsideDiameter = 0.052;
    const draft = await aFullDraft(test.db, engineer, companyId, { requirement });
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const safety = resultOf(stored.body).findings.find((one) => one.severity === 'blocker' && one.safety);
    if (!safety) throw new Error('a part that touches the coil is a safety matter');
    expect(
      await refusalCode(
        answerFinding(test.db, engineer, {
          requestId: draft.id,
          checkId: stored.checkId,
          code: safety.code,
          subject: safety.subject,
          kind: 'carried',
          reason: 'We will be careful, believe us.',
        }),
      ),
    ).toBe('state-conflict');
    expect(await test.db.select().from(checkAcknowledgement)).toHaveLength(0);
  });
});

describe('posting', () => {
  it('freezes the numbered specification whose hash is of the bytes stored', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const posted = await postDraft(test.db, engineer, draft);
    const row = await requestForUpdate(test.db, draft.id);
    expect([row.state, row.currentSpecificationId, row.shape, row.quantity]).toEqual([
      'posted',
      posted.specificationId,
      'helix',
      1,
    ]);
    const frozen = await specificationOf(test.db, draft.id);
    expect(frozen?.number).toBe(1);
    expect(frozen?.hash).toBe(sha256Hex(frozen?.body ?? ''));
    const body = readSpecification(frozen?.body ?? '');
    expect(body.requirement).toEqual(row.requirement);
    expect(frozen?.body).not.toContain('777777');
    expect(frozen?.body).not.toContain('SECRET');
    const events = await test.db.select().from(auditEvent).where(eq(auditEvent.subjectId, draft.id));
    expect(events.map((event) => event.action)).toContain('request.post');
  });

  it('leaves a specification that can be neither changed nor deleted', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    await postDraft(test.db, engineer, draft);
    await expect(test.db.update(specification).set({ body: '{}' })).rejects.toThrow();
    await expect(test.db.delete(specification)).rejects.toThrow();
    expect((await specificationOf(test.db, draft.id))?.body.length).toBeGreaterThan(1000);
  });

  it('takes only the check of exactly this version', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const { form } = await requestForUpdate(test.db, draft.id);
    const saved = await saveDraft(test.db, engineer, {
      requestId: draft.id,
      version: draft.version,
      form: { ...form, values: { ...form.values, 'coil.winding.pitch': '14' } },
      machineId: null,
      machineVersion: null,
    });
    expect(
      await refusalCode(
        postRequest(test.db, engineer, {
          requestId: draft.id,
          version: saved.version,
          checkId: stored.checkId,
        }),
      ),
    ).toBe('state-conflict');
    expect(
      await refusalCode(
        postRequest(test.db, engineer, {
          requestId: draft.id,
          version: draft.version,
          checkId: stored.checkId,
        }),
      ),
    ).toBe('version-conflict');
    expect((await requestForUpdate(test.db, draft.id)).state).toBe('draft');
  });

  it('refuses the check of another request', async () => {
    const one = await aFullDraft(test.db, engineer, companyId);
    const two = await aFullDraft(test.db, engineer, companyId);
    const stored = await checkDraft(test.db, engineer, { requestId: one.id, version: one.version });
    expect(
      await refusalCode(
        postRequest(test.db, engineer, { requestId: two.id, version: two.version, checkId: stored.checkId }),
      ),
    ).toBe('state-conflict');
  });

  it('waits for every caution to be acknowledged', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId, { requirement: troubled() });
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    expect(openFindings(resultOf(stored.body).findings, []).cautions.length).toBeGreaterThan(0);
    const refused = await refusal(
      postRequest(test.db, engineer, {
        requestId: draft.id,
        version: draft.version,
        checkId: stored.checkId,
      }),
    );
    expect(refused.code).toBe('state-conflict');
    expect(refused.message).toMatch(/not acknowledged/);
  });

  it('refuses a closing day in the past by its field', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId, {
      values: { 'commercial.closesOn': '2020-01-01', 'commercial.needBy': '' },
    });
    const refused = await refusal(postDraft(test.db, engineer, draft));
    expect(refused.fields).toHaveProperty(['commercial.closesOn']);
    expect((await requestForUpdate(test.db, draft.id)).state).toBe('draft');
  });

  it('takes an engineer or owner with a confirmed address', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const input = { requestId: draft.id, version: draft.version, checkId: stored.checkId };
    for (const { actor, code } of strangers()) {
      expect(await refusalCode(postRequest(test.db, actor, input))).toBe(code);
    }
    const unconfirmed = await aMember(test.db, companyId, ['engineer'], { emailVerified: false });
    expect(await refusalCode(postRequest(test.db, unconfirmed, input))).toBe('email-not-verified');
    expect((await requestForUpdate(test.db, draft.id)).state).toBe('draft');
    expect(await test.db.select().from(specification)).toHaveLength(0);
  });

  it('happens once when pressed twice at once', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const input = { requestId: draft.id, version: draft.version, checkId: stored.checkId };
    const results = await Promise.allSettled([
      postRequest(test.db, engineer, input),
      postRequest(test.db, engineer, input),
    ]);
    expect(results.map((one) => one.status).sort()).toEqual(['fulfilled', 'rejected']);
    expect(await test.db.select().from(specification)).toHaveLength(1);
  });
});
