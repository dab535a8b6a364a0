import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { exampleMachine } from '../../../src/lib/induction/check/examples.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import {
  createMachine,
  editMachine,
  listMachines,
  setMachineArchived,
  viewMachine,
} from '../../../src/lib/server/machines/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { aCompany, aMember } from '../../support/people.ts';
import { refusal, refusalCode } from '../../support/refusal.ts';

let test: TestDatabase;
let companyId: string;
let engineer: Actor;
let technician: Actor;
let purchaser: Actor;
let outsider: Actor;
let fabricator: Actor;

beforeEach(async () => {
  test = await testDatabase();
  companyId = await aCompany(test.db, 'buyer');
  engineer = await aMember(test.db, companyId, ['engineer']);
  technician = await aMember(test.db, companyId, ['technician']);
  purchaser = await aMember(test.db, companyId, ['purchaser']);
  outsider = await aMember(test.db, await aCompany(test.db, 'buyer'), ['owner']);
  fabricator = await aMember(test.db, await aCompany(test.db, 'fabricator', { verified: true }), ['owner']);
});
afterEach(() => test.close());

const entered = () =>
  createMachine(test.db, engineer, { companyId, commandId: newId(), machine: exampleMachine() });

describe('machines', () => {
  it('are entered once, however often the button is pressed', async () => {
    const commandId = newId();
    const input = { companyId, commandId, machine: exampleMachine() };
    const first = await createMachine(test.db, engineer, input);
    const second = await createMachine(test.db, engineer, input);
    expect(second.id).toBe(first.id);
    expect(await listMachines(test.db, engineer)).toHaveLength(1);
  });

  it('keep every state as a revision and refuse a save over a newer one with that state', async () => {
    const { id } = await entered();
    await editMachine(test.db, engineer, {
      machineId: id,
      version: 1,
      machine: { ...exampleMachine(), name: 'Cell 2b' },
    });
    const stale = await refusal(
      editMachine(test.db, engineer, {
        machineId: id,
        version: 1,
        machine: { ...exampleMachine(), name: 'Other' },
      }),
    );
    expect(stale.code).toBe('version-conflict');
    expect(stale.data).toMatchObject({ version: 2, machine: { name: 'Cell 2b' } });
    const view = await viewMachine(test.db, engineer, id);
    expect(view.body.name).toBe('Cell 2b');
    expect(view.revisions.map((one) => one.number)).toEqual([2, 1]);
  });

  it('are put aside and brought back, and cannot be edited meanwhile', async () => {
    const { id } = await entered();
    await setMachineArchived(test.db, engineer, { machineId: id, version: 1, archived: true });
    expect(await listMachines(test.db, engineer)).toHaveLength(0);
    expect(await listMachines(test.db, engineer, { withArchived: true })).toHaveLength(1);
    expect(
      await refusalCode(
        editMachine(test.db, engineer, { machineId: id, version: 1, machine: exampleMachine() }),
      ),
    ).toBe('state-conflict');
    await setMachineArchived(test.db, engineer, { machineId: id, version: 1, archived: false });
    expect(await listMachines(test.db, engineer)).toHaveLength(1);
  });

  it('are edited by engineers and owners alone; lesser roles may look', async () => {
    const { id } = await entered();
    for (const lesser of [technician, purchaser]) {
      expect(
        await refusalCode(
          createMachine(test.db, lesser, { companyId, commandId: newId(), machine: exampleMachine() }),
        ),
      ).toBe('not-allowed');
      expect(
        await refusalCode(
          editMachine(test.db, lesser, { machineId: id, version: 1, machine: exampleMachine() }),
        ),
      ).toBe('not-allowed');
      expect(
        await refusalCode(setMachineArchived(test.db, lesser, { machineId: id, version: 1, archived: true })),
      ).toBe('not-allowed');
      expect((await viewMachine(test.db, lesser, id)).mayEdit).toBe(false);
    }
    expect((await viewMachine(test.db, engineer, id)).version).toBe(1);
  });

  it('do not exist for other companies', async () => {
    const { id } = await entered();
    for (const other of [outsider, fabricator]) {
      expect(await refusalCode(viewMachine(test.db, other, id))).toBe('not-found');
      expect(
        await refusalCode(
          editMachine(test.db, other, { machineId: id, version: 1, machine: exampleMachine() }),
        ),
      ).toBe('not-found');
      expect(
        await refusalCode(setMachineArchived(test.db, other, { machineId: id, version: 1, archived: true })),
      ).toBe('not-found');
      expect(
        await refusalCode(
          createMachine(test.db, other, { companyId, commandId: newId(), machine: exampleMachine() }),
        ),
      ).toBe('not-found');
      expect(await listMachines(test.db, other)).toEqual([]);
    }
    const view = await viewMachine(test.db, engineer, id);
    expect([view.version, view.archivedAt]).toEqual([1, null]);
  });
});
