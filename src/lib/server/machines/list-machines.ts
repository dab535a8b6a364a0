import { and, asc, desc, eq, inArray, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { Machine } from '../../induction/check/types.ts';
import { can, requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { machine, machineRevision } from '../db/schema/machines.ts';
import { machineById } from './queries.ts';

export interface MachineListItem {
  id: string;
  companyId: string;
  companyName: string;
  name: string;
  tank: Machine['tank'];
  ratedPower: number | null;
  frequencyMin: number | null;
  frequencyMax: number | null;
  archivedAt: number | null;
  updatedAt: number;
  version: number;
}

/** The machines of every company in which the actor may see them, archived ones last. */
export async function listMachines(
  reader: Reader,
  actor: Actor,
  options: { companyId?: string; withArchived?: boolean } = {},
): Promise<MachineListItem[]> {
  if (options.companyId) requireAccess(actor, 'machine.view', { companyId: options.companyId });
  const companies = actor.memberships.filter(
    (m) =>
      can(actor, 'machine.view', { companyId: m.companyId }) &&
      (!options.companyId || m.companyId === options.companyId),
  );
  if (companies.length === 0) return [];
  const rows = await reader
    .select()
    .from(machine)
    .where(
      and(
        inArray(
          machine.companyId,
          companies.map((m) => m.companyId),
        ),
        options.withArchived ? undefined : isNull(machine.archivedAt),
      ),
    )
    .orderBy(asc(machine.archivedAt), asc(machine.name))
    .limit(500);
  const names = new Map(companies.map((m) => [m.companyId, m.companyName]));
  return rows.map((row) => ({
    id: row.id,
    companyId: row.companyId,
    companyName: names.get(row.companyId) ?? '',
    name: row.name,
    tank: row.body.tank,
    ratedPower: row.body.supply.ratedPower,
    frequencyMin: row.body.supply.frequencyMin,
    frequencyMax: row.body.supply.frequencyMax,
    archivedAt: row.archivedAt,
    updatedAt: row.updatedAt,
    version: row.version,
  }));
}

export interface MachineView {
  id: string;
  companyId: string;
  body: Machine;
  archivedAt: number | null;
  version: number;
  mayEdit: boolean;
  revisions: { number: number; savedAt: number; savedBy: string }[];
}

/** One machine with the list of its revisions. */
export async function viewMachine(reader: Reader, actor: Actor, id: string): Promise<MachineView> {
  const row = await machineById(reader, id);
  requireAccess(actor, 'machine.view', { companyId: row.companyId });
  const revisions = await reader
    .select({ number: machineRevision.number, savedAt: machineRevision.savedAt, savedBy: user.name })
    .from(machineRevision)
    .innerJoin(user, eq(user.id, machineRevision.savedBy))
    .where(eq(machineRevision.machineId, id))
    .orderBy(desc(machineRevision.number))
    .limit(50);
  return {
    id: row.id,
    companyId: row.companyId,
    body: row.body,
    archivedAt: row.archivedAt,
    version: row.version,
    mayEdit: can(actor, 'machine.edit', { companyId: row.companyId }),
    revisions,
  };
}
