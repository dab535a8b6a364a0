import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { Machine } from '../../induction/check/types.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { machine, machineRevision } from '../db/schema/machines.ts';
import { machineById } from './queries.ts';

export interface EditMachineInput {
  machineId: string;
  /** The version that was seen; another one is a conflict that carries the newer state. */
  version: number;
  machine: Machine;
}

/** Saves a machine as its next revision; specifications keep the state they froze. */
export async function editMachine(
  db: Database,
  actor: Actor,
  input: EditMachineInput,
): Promise<{ id: string; version: number }> {
  return transact(db, async (tx) => {
    const row = await machineById(tx, input.machineId);
    requireAccess(actor, 'machine.edit', { companyId: row.companyId });
    if (row.archivedAt !== null) {
      throw new AppError('state-conflict', { detail: 'This machine is archived. Bring it back first.' });
    }
    if (row.version !== input.version) {
      throw new AppError('version-conflict', { data: { version: row.version, machine: row.body } });
    }
    const now = await businessNow(tx);
    const version = row.version + 1;
    await tx
      .update(machine)
      .set({ name: input.machine.name, body: input.machine, updatedAt: now, version })
      .where(and(eq(machine.id, row.id), eq(machine.version, input.version)));
    await tx.insert(machineRevision).values({
      id: newId(),
      machineId: row.id,
      number: version,
      body: input.machine,
      savedAt: now,
      savedBy: actor.userId,
    });
    await audit(tx, actor, {
      action: 'machine.edit',
      subjectType: 'machine',
      subjectId: row.id,
      companyId: row.companyId,
      detail: { version },
    });
    return { id: row.id, version };
  });
}

/** Puts a machine aside or brings it back. Requests that use it keep their copy. */
export async function setMachineArchived(
  db: Database,
  actor: Actor,
  input: { machineId: string; version: number; archived: boolean },
): Promise<void> {
  await transact(db, async (tx) => {
    const row = await machineById(tx, input.machineId);
    requireAccess(actor, 'machine.edit', { companyId: row.companyId });
    if (row.version !== input.version) {
      throw new AppError('version-conflict', { data: { version: row.version, machine: row.body } });
    }
    if ((row.archivedAt !== null) === input.archived) return;
    const now = await businessNow(tx);
    await tx
      .update(machine)
      .set({ archivedAt: input.archived ? now : null, updatedAt: now })
      .where(and(eq(machine.id, row.id), eq(machine.version, input.version)));
    await audit(tx, actor, {
      action: input.archived ? 'machine.archive' : 'machine.bring-back',
      subjectType: 'machine',
      subjectId: row.id,
      companyId: row.companyId,
    });
  });
}
