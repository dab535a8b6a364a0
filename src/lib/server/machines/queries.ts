import { eq } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import type { Reader } from '../db/index.ts';
import { machine } from '../db/schema/machines.ts';

export type MachineRow = typeof machine.$inferSelect;

export async function machineById(reader: Reader, id: string): Promise<MachineRow> {
  const [row] = await reader.select().from(machine).where(eq(machine.id, id));
  if (!row) throw new AppError('not-found');
  return row;
}
