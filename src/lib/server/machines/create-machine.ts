import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { Machine } from '../../induction/check/types.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { machine, machineRevision } from '../db/schema/machines.ts';

export interface CreateMachineInput {
  companyId: string;
  /** Random, made with the form: pressing twice makes one machine. */
  commandId: string;
  machine: Machine;
}

/** Enters a machine of a buyer with its first revision. */
export async function createMachine(
  db: Database,
  actor: Actor,
  input: CreateMachineInput,
): Promise<{ id: string; version: number }> {
  requireAccess(actor, 'machine.edit', { companyId: input.companyId });
  return transact(db, async (tx) => {
    const [existing] = await tx
      .select({ id: machine.id, companyId: machine.companyId, version: machine.version })
      .from(machine)
      .where(eq(machine.commandId, input.commandId));
    if (existing) {
      if (existing.companyId !== input.companyId) throw new AppError('already-exists');
      return { id: existing.id, version: existing.version };
    }
    const id = newId();
    const now = await businessNow(tx);
    await tx.insert(machine).values({
      id,
      companyId: input.companyId,
      name: input.machine.name,
      body: input.machine,
      createdAt: now,
      updatedAt: now,
      createdBy: actor.userId,
      commandId: input.commandId,
    });
    await tx.insert(machineRevision).values({
      id: newId(),
      machineId: id,
      number: 1,
      body: input.machine,
      savedAt: now,
      savedBy: actor.userId,
    });
    await audit(tx, actor, {
      action: 'machine.create',
      subjectType: 'machine',
      subjectId: id,
      companyId: input.companyId,
    });
    return { id, version: 1 };
  });
}
