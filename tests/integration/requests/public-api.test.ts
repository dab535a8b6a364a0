import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import { exampleRequirement } from '../../../src/lib/induction/check/examples.ts';
import { checkResultSchema } from '../../../src/lib/schemas/api/check.ts';
import { heatingStateSchema } from '../../../src/lib/schemas/api/heating.ts';
import { impedanceResponseSchema } from '../../../src/lib/schemas/api/impedance.ts';
import {
  askHeating,
  cancelHeating,
  clearOldHeatings,
  closeSolvePool,
  heatingState,
  limitChecks,
  mostResultBytes,
  runCheck,
  runSweep,
} from '../../../src/lib/server/checks/index.ts';
import { config } from '../../../src/lib/server/config/index.ts';
import { heatingRun } from '../../../src/lib/server/db/schema/checks.ts';
import { drainJobs } from '../../../src/lib/server/workflows/run-worker.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aPerson } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let test: TestDatabase;
beforeEach(async () => {
  test = await testDatabase();
});
afterEach(() => test.close());
afterAll(() => closeSolvePool());

const send = () => Promise.resolve();
const somewhere = { address: '192.0.2.7' };
const wish = (duration: number | null = 0.4) => ({
  requirement: exampleRequirement(),
  drive: null,
  frequency: null,
  duration,
  setting: 'preview' as const,
});

describe('the check on a thread', () => {
  it('gives the same bytes for the same requirement, in any order of its keys', async () => {
    const one = await runCheck(exampleRequirement(), 'preview');
    const { machine, ...rest } = exampleRequirement();
    const two = await runCheck({ ...rest, machine }, 'preview');
    expect(two.requirementHash).toBe(one.requirementHash);
    expect(two.body).toBe(one.body);
    expect(checkResultSchema.safeParse(JSON.parse(one.body)).success).toBe(true);
    expect(one.body.length).toBeLessThan(mostResultBytes);
  });

  it('is limited per address and per account, with the seconds to wait', async () => {
    const most = config().limits.publicChecksPerMinute;
    for (let count = 0; count < most; count += 1) await limitChecks(test.db, somewhere);
    const refused = await refusal(limitChecks(test.db, somewhere));
    expect([refused.code, refused.status]).toEqual(['too-many-requests', 429]);
    expect(refused.message).toMatch(/try again in \d+ s/);
    await limitChecks(test.db, { address: '192.0.2.8' });
    await limitChecks(test.db, { userId: 'somebody' });
  });
});

describe('impedance', () => {
  it('answers bare and loaded at each frequency; a part of copper lowers the inductance', async () => {
    const { coil } = exampleRequirement();
    const sweep = {
      coil,
      part: {
        form: 'cylinder' as const,
        outsideDiameter: 0.04,
        insideDiameter: 0,
        length: 0.12,
        axialOffset: 0,
        material: { kind: 'plain' as const, resistivity: 1.7e-8, relativePermeability: 1 },
        temperatureC: 20,
      },
      includeLeads: false,
      frequencies: [10e3, 20e3],
      setting: 'preview' as const,
    };
    const answer = impedanceResponseSchema.parse(JSON.parse(await runSweep(sweep)));
    expect(answer.results.map((one) => one.frequency)).toEqual([10e3, 20e3]);
    for (const { bare, loaded } of answer.results) {
      expect(loaded?.inductance ?? 1).toBeLessThan(bare.inductance);
      expect(loaded?.resistance ?? 0).toBeGreaterThan(bare.resistance);
    }
  });

  it('says by its field what cannot be computed', async () => {
    const { coil } = exampleRequirement();
    const refused = await refusal(
      runSweep({
        coil: { ...coil, winding: { shape: 'drawing', note: 'as sketched' } },
        part: null,
        includeLeads: false,
        frequencies: [10e3],
        setting: 'preview',
      }),
    );
    expect(refused.code).toBe('invalid-input');
    expect(Object.keys(refused.fields)[0]).toMatch(/^coil/);
  });
});

describe('a heating run', () => {
  it('is begun as a job, run by the worker, and answers temperatures that rise', async () => {
    const { id } = await askHeating(test.db, somewhere, wish());
    expect(heatingStateSchema.parse(await heatingState(test.db, null, id)).state).toBe('queued');
    await drainJobs(test.db, { send });
    const state = heatingStateSchema.parse(await heatingState(test.db, null, id));
    expect([state.state, state.progress, state.message]).toEqual(['done', 1, null]);
    const curve = state.result?.curve ?? [];
    expect(curve.length).toBeGreaterThan(2);
    expect(curve.at(-1)?.surfaceC ?? 0).toBeGreaterThan(100);
    expect(Math.abs(state.result?.balance.closure ?? 1)).toBeLessThan(0.02);
  });

  it('that cannot be computed fails once with its reason', async () => {
    const input = wish();
    input.requirement.coil.winding = { shape: 'drawing', note: 'as sketched' };
    const { id } = await askHeating(test.db, somewhere, input);
    await drainJobs(test.db, { send });
    const state = await heatingState(test.db, null, id);
    expect(state.state).toBe('failed');
    expect(state.message).toMatch(/\w/);
    expect(state.result).toBeNull();
  });

  it('made with an account is there for that account alone, and can be cancelled by it', async () => {
    const owner = await aPerson(test.db);
    const { id } = await askHeating(test.db, { userId: owner.userId }, wish());
    expect(await refusalCode(heatingState(test.db, null, id))).toBe('not-found');
    expect(await refusalCode(cancelHeating(test.db, 'someone-else', id))).toBe('not-found');
    expect((await heatingState(test.db, owner.userId, id)).state).toBe('queued');
    await cancelHeating(test.db, owner.userId, id);
    expect((await heatingState(test.db, owner.userId, id)).state).toBe('cancelled');
    await drainJobs(test.db, { send });
    expect((await heatingState(test.db, owner.userId, id)).result).toBeNull();
  });

  it('is cleared away after a day', async () => {
    const { id } = await askHeating(test.db, somewhere, wish());
    await clearOldHeatings(test.db);
    expect((await heatingState(test.db, null, id)).id).toBe(id);
    await test.db.update(heatingRun).set({ expiresAt: Date.now() - 1 });
    expect(await refusalCode(heatingState(test.db, null, id))).toBe('not-found');
    await clearOldHeatings(test.db);
    expect(await test.db.select().from(heatingRun)).toHaveLength(0);
  });
});
