import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { openFindings } from '../../../src/lib/domain/finding-answers.ts';
import { exampleMachine, exampleRequirement } from '../../../src/lib/induction/check/examples.ts';
import type { Requirement } from '../../../src/lib/induction/check/types.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { closeSolvePool, requirementKey, resultOf } from '../../../src/lib/server/checks/index.ts';
import { check, checkAcknowledgement } from '../../../src/lib/server/db/schema/checks.ts';
import { request } from '../../../src/lib/server/db/schema/requests.ts';
import { createMachine } from '../../../src/lib/server/machines/index.ts';
import {
  answerFinding,
  checkDraft,
  createDraft,
  listRequests,
  requestForUpdate,
  saveDraft,
  viewDraft,
} from '../../../src/lib/server/requests/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aFullDraft } from '../../support/drafts.ts';
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

describe('drafts', () => {
  it('are begun once per press, numbered from 1001 in each company', async () => {
    const commandId = newId();
    const input = { companyId, commandId, from: { kind: 'empty' as const } };
    const first = await createDraft(test.db, engineer, input);
    expect(first.number).toBe(1001);
    expect((await createDraft(test.db, engineer, input)).id).toBe(first.id);
    const next = await createDraft(test.db, engineer, { ...input, commandId: newId() });
    expect(next.number).toBe(1002);
    expect((await listRequests(test.db, engineer)).items.map((item) => item.number).sort()).toEqual([
      1001, 1002,
    ]);
  });

  it('start from a machine or an earlier request of the same company, never of another', async () => {
    const machine = await createMachine(test.db, engineer, {
      companyId,
      commandId: newId(),
      machine: exampleMachine(),
    });
    const fromMachine = await createDraft(test.db, engineer, {
      companyId,
      commandId: newId(),
      from: { kind: 'machine', machineId: machine.id },
    });
    const draft = await viewDraft(test.db, engineer, fromMachine.id);
    expect([draft.machineId, draft.machineVersion]).toEqual([machine.id, 1]);
    expect(draft.form.values['machine.name']).toBe(exampleMachine().name);

    const full = await aFullDraft(test.db, engineer, companyId);
    const again = await createDraft(test.db, engineer, {
      companyId,
      commandId: newId(),
      from: { kind: 'request', requestId: full.id },
    });
    expect((await requestForUpdate(test.db, again.id)).requirement).toEqual(
      (await requestForUpdate(test.db, full.id)).requirement,
    );

    const theirs = outsider.memberships[0]?.companyId ?? '';
    for (const from of [
      { kind: 'machine' as const, machineId: machine.id },
      { kind: 'request' as const, requestId: full.id },
    ]) {
      expect(
        await refusalCode(createDraft(test.db, outsider, { companyId: theirs, commandId: newId(), from })),
      ).toBe('not-found');
    }
    expect((await listRequests(test.db, outsider)).items).toEqual([]);
  });

  it('keep half-typed text as it is and say that the requirement is not complete', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const { form } = await requestForUpdate(test.db, draft.id);
    const saved = await saveDraft(test.db, engineer, {
      requestId: draft.id,
      version: draft.version,
      form: { ...form, values: { ...form.values, 'part.length': '12 mmm' } },
      machineId: null,
      machineVersion: null,
    });
    expect(saved.requirementComplete).toBe(false);
    const view = await viewDraft(test.db, engineer, draft.id);
    expect(view.form.values['part.length']).toBe('12 mmm');
    expect(
      await refusalCode(checkDraft(test.db, engineer, { requestId: draft.id, version: saved.version })),
    ).toBe('invalid-input');
  });

  it('refuse a save over a newer version and hand over that version', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const { form } = await requestForUpdate(test.db, draft.id);
    const stale = await refusal(
      saveDraft(test.db, engineer, {
        requestId: draft.id,
        version: draft.version - 1,
        form: { ...form, values: { title: 'lost update' } },
        machineId: null,
        machineVersion: null,
      }),
    );
    expect(stale.code).toBe('version-conflict');
    expect(stale.data).toMatchObject({
      version: draft.version,
      form: { values: { title: 'Coil for 40 mm shaft' } },
    });
    expect((await requestForUpdate(test.db, draft.id)).title).toBe('Coil for 40 mm shaft');
  });

  it('are made, saved, checked and seen by engineers and owners of the company alone', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    const { form } = await requestForUpdate(test.db, draft.id);
    for (const { actor, code } of strangers()) {
      expect(
        await refusalCode(
          createDraft(test.db, actor, { companyId, commandId: newId(), from: { kind: 'empty' } }),
        ),
      ).toBe(code);
      expect(
        await refusalCode(
          saveDraft(test.db, actor, {
            requestId: draft.id,
            version: draft.version,
            form: { ...form, values: {} },
            machineId: null,
            machineVersion: null,
          }),
        ),
      ).toBe(code);
      expect(
        await refusalCode(checkDraft(test.db, actor, { requestId: draft.id, version: draft.version })),
      ).toBe(code);
      expect(await refusalCode(viewDraft(test.db, actor, draft.id))).toBe(code);
    }
    const after = await requestForUpdate(test.db, draft.id);
    expect([after.version, after.title]).toEqual([draft.version, 'Coil for 40 mm shaft']);
    expect(await test.db.select().from(request)).toHaveLength(1);
    expect(await test.db.select().from(check)).toHaveLength(0);
  });
});

describe('the stored check', () => {
  it('is of exactly the saved requirement and keeps its answers while only the terms change', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId, { requirement: troubled() });
    const first = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const row = await requestForUpdate(test.db, draft.id);
    const [stored] = await test.db.select().from(check).where(eq(check.id, first.checkId));
    if (!row.requirement) throw new Error('the draft is complete');
    expect(stored?.requirementHash).toBe(requirementKey(row.requirement).hash);
    expect(stored?.setting).toBe('default');

    const caution = openFindings(resultOf(first.body).findings, []).cautions[0];
    if (!caution) throw new Error('an unknown supply range is worth a caution');
    await answerFinding(test.db, engineer, {
      requestId: draft.id,
      checkId: first.checkId,
      code: caution.code,
      subject: caution.subject,
      kind: 'acknowledged',
    });

    const terms = await saveDraft(test.db, engineer, {
      requestId: draft.id,
      version: draft.version,
      form: { ...row.form, values: { ...row.form.values, 'commercial.quantity': '3' } },
      machineId: null,
      machineVersion: null,
    });
    const same = await checkDraft(test.db, engineer, { requestId: draft.id, version: terms.version });
    expect([same.checkId, same.requestVersion, same.answers.length]).toEqual([
      first.checkId,
      terms.version,
      1,
    ]);

    const changed = await saveDraft(test.db, engineer, {
      requestId: draft.id,
      version: terms.version,
      form: { ...row.form, values: { ...row.form.values, 'coil.winding.pitch': '14' } },
      machineId: null,
      machineVersion: null,
    });
    const other = await checkDraft(test.db, engineer, { requestId: draft.id, version: changed.version });
    expect(other.checkId).not.toBe(first.checkId);
    expect(other.answers).toEqual([]);
  });

  it('is refused for another version than the saved one', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId);
    expect(
      await refusalCode(checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version - 1 })),
    ).toBe('version-conflict');
  });

  it('is answered by engineers of the company alone, and only about findings it has', async () => {
    const draft = await aFullDraft(test.db, engineer, companyId, { requirement: troubled() });
    const stored = await checkDraft(test.db, engineer, { requestId: draft.id, version: draft.version });
    const caution = openFindings(resultOf(stored.body).findings, []).cautions[0];
    if (!caution) throw new Error('an unknown supply range is worth a caution');
    const answer = {
      requestId: draft.id,
      checkId: stored.checkId,
      code: caution.code,
      subject: caution.subject,
      kind: 'acknowledged' as const,
    };
    for (const { actor, code } of strangers()) {
      expect(await refusalCode(answerFinding(test.db, actor, answer))).toBe(code);
    }
    expect(await refusalCode(answerFinding(test.db, engineer, { ...answer, subject: 'coil.nothing' }))).toBe(
      'not-found',
    );
    expect(
      await refusalCode(
        answerFinding(test.db, engineer, { ...answer, kind: 'carried', reason: 'we know this machine well' }),
      ),
    ).toBe('state-conflict');
    expect(await test.db.select().from(checkAcknowledgement)).toHaveLength(0);
    await answerFinding(test.db, engineer, answer);
    await answerFinding(test.db, engineer, answer);
    const rows = await test.db.select().from(checkAcknowledgement);
    expect(rows.map((row) => [row.kind, row.name])).toEqual([['acknowledged', 'Process engineer']]);
  });
});
