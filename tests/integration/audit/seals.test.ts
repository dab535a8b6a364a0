import { createHash } from 'node:crypto';
import { sql } from 'drizzle-orm';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { audit } from '../../../src/lib/server/audit/index.ts';
import { sealAudit, verifyAudit } from '../../../src/lib/server/audit/seals.ts';
import { transact } from '../../../src/lib/server/db/index.ts';
import { auditEvent } from '../../../src/lib/server/db/schema/platform.ts';
import { auditSeal } from '../../../src/lib/server/db/schema/verification.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aPerson } from '../../support/people.ts';

let t: TestDatabase;
let person: Actor;

beforeEach(async () => {
  t = await testDatabase();
  person = await aPerson(t.db);
});
afterEach(() => t.close());

async function write(count: number, note = 'x') {
  await transact(t.db, async (tx) => {
    for (let n = 0; n < count; n += 1) {
      await audit(tx, person, {
        action: 'test.act',
        subjectType: 'thing',
        subjectId: `${note}-${n}`,
        detail: { n },
      });
    }
  });
}

/** Somebody who has the file in hand: the guards of the database are no guards then. */
async function tamper(statement: string) {
  for (const trigger of [
    'audit_event_no_update',
    'audit_event_no_delete',
    'audit_event_seal_once',
    'audit_seal_no_update',
    'audit_seal_no_delete',
  ]) {
    await t.db.run(sql.raw(`drop trigger if exists ${trigger}`));
  }
  await t.db.run(sql.raw(statement));
}

async function threeSeals() {
  for (const note of ['a', 'b', 'c']) {
    await write(3, note);
    await sealAudit(t.db);
  }
}

describe('sealing', () => {
  test('each run seals what is new, chained to the seal before; an untouched trail is found whole', async () => {
    await threeSeals();
    expect(await sealAudit(t.db)).toBe(0);
    const seals = await t.db.select().from(auditSeal).orderBy(auditSeal.number);
    expect(seals.map((seal) => [seal.number, seal.rowCount])).toEqual([
      [1, 3],
      [2, 3],
      [3, 3],
    ]);
    expect(seals[1]?.previous).toBe(seals[0]?.seal);
    await write(2);
    expect(await verifyAudit(t.db)).toEqual({
      seals: 3,
      sealedRows: 9,
      unsealedRows: 2,
      newestSeal: seals[2]?.seal,
      problems: [],
    });
  });

  test('the seal is the SHA-256 that anyone can compute from the rows', async () => {
    await write(1);
    await sealAudit(t.db);
    const raw = await t.db.$client.execute('select * from audit_event');
    const row = raw.rows[0];
    const cells = [
      'id',
      'at',
      'actor_kind',
      'actor_user_id',
      'company_id',
      'action',
      'subject_type',
      'subject_id',
      'detail',
      'request_id',
    ].map((name) => row?.[name]);
    const text = `${'0'.repeat(64)}\n1\n1\n${JSON.stringify(cells)}\n`;
    expect(row?.['seal']).toBe(createHash('sha256').update(text).digest('hex'));
  });

  test('many rows take several seals and two workers at once seal each row once', async () => {
    await write(1100);
    await Promise.all([sealAudit(t.db), sealAudit(t.openAnother())]);
    await sealAudit(t.db);
    const verdict = await verifyAudit(t.db);
    expect(verdict).toMatchObject({ sealedRows: 1100, unsealedRows: 0, problems: [] });
    expect(verdict.seals).toBeGreaterThanOrEqual(3);
  });

  test('the database refuses to change a sealed row, its seal, or a seal', async () => {
    await threeSeals();
    const refused = /append-only|stays sealed/;
    for (const statement of [
      `update audit_event set action = 'other'`,
      `update audit_event set seal = null`,
      `delete from audit_event`,
      `update audit_seal set row_count = 1`,
      `delete from audit_seal`,
    ]) {
      await expect(t.db.$client.execute(statement)).rejects.toThrow(refused);
    }
    expect(await verifyAudit(t.db)).toMatchObject({ seals: 3, problems: [] });
  });
});

describe('a trail that was touched', () => {
  test.each([
    ['a changed row', `update audit_event set detail = '{"n":7}' where subject_id = 'b-1'`, 2, 'rows-differ'],
    [
      'a changed actor',
      `update audit_event set actor_user_id = null where subject_id = 'a-0'`,
      1,
      'rows-differ',
    ],
    ['a removed row', `delete from audit_event where subject_id = 'b-2'`, 2, 'rows-differ'],
    [
      'a row that lost its seal',
      `update audit_event set seal = null where subject_id = 'c-0'`,
      3,
      'rows-differ',
    ],
    ['a removed seal', `delete from audit_seal where number = 2`, 3, 'chain-broken'],
    [
      'a row with a seal of its own',
      `update audit_event set seal = '${'f'.repeat(64)}' where subject_id = 'c-0'`,
      null,
      'unknown-seal',
    ],
  ])('%s is found', async (_what, statement, number, what) => {
    await threeSeals();
    await tamper(statement);
    expect((await verifyAudit(t.db)).problems).toContainEqual({ number, what });
  });

  test('a batch that is sealed anew after a change breaks the chain behind it', async () => {
    await threeSeals();
    await tamper(`update audit_event set action = 'other' where subject_id = 'a-0'`);
    const [first] = await t.db.select().from(auditSeal);
    const rows = await t.db.select().from(auditEvent);
    const forged = createHash('sha256').update(JSON.stringify(rows)).digest('hex');
    await t.db.run(sql.raw(`update audit_seal set seal = '${forged}' where number = 1`));
    await t.db.run(sql.raw(`update audit_event set seal = '${forged}' where seal = '${first?.seal}'`));
    const { problems } = await verifyAudit(t.db);
    expect(problems).toContainEqual({ number: 2, what: 'chain-broken' });
  });
});
