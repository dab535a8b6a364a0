import { and, eq, sql, type SQL } from 'drizzle-orm';
import type { SQLiteColumn, SQLiteTable, SQLiteUpdateSetSource } from 'drizzle-orm/sqlite-core';
import { AppError } from '../../domain/errors.ts';
import { nextState, type StateMachine } from '../../domain/transitions.ts';
import { audit, type By } from '../audit/index.ts';
import type { Tx } from './index.ts';

export interface StatefulTable extends SQLiteTable {
  id: SQLiteColumn;
  version: SQLiteColumn;
}

export interface TransitionInput<State extends string, Event extends string, Table extends StatefulTable> {
  machine: StateMachine<State, Event>;
  table: Table;
  /** The column that holds the state (`state`, `work`, `money`). */
  column: SQLiteColumn;
  columnName: keyof Table['$inferInsert'] & string;
  id: string;
  /** The state read before, in this transaction. */
  from: State;
  event: Event;
  by: By;
  companyId?: string | null;
  set?: SQLiteUpdateSetSource<Table>;
  detail?: Record<string, unknown>;
  /** The version the person saw, where a form carried one. */
  expectedVersion?: number;
}

/**
 * The only way a status is written: the state row moves along the table of its machine, together with
 * an audit row, in the caller's transaction. An event that is not possible from this state, or a row
 * that somebody moved in the meantime, is a conflict; nothing is written then.
 */
export async function transition<State extends string, Event extends string, Table extends StatefulTable>(
  tx: Tx,
  input: TransitionInput<State, Event, Table>,
): Promise<State> {
  const to = nextState(input.machine, input.from, input.event);
  if (to === undefined) {
    throw new AppError('state-conflict', {
      detail: `This is no longer possible: ${input.machine.name} is “${input.from}”.`,
    });
  }
  const conditions: SQL[] = [eq(input.table.id, input.id), eq(input.column, input.from)];
  if (input.expectedVersion !== undefined) conditions.push(eq(input.table.version, input.expectedVersion));
  const result = await tx
    .update(input.table)
    .set({
      ...input.set,
      [input.columnName]: to,
      version: sql`${input.table.version} + 1`,
    } as SQLiteUpdateSetSource<Table>)
    .where(and(...conditions));
  if (result.rowsAffected !== 1) throw new AppError('version-conflict');
  await audit(tx, input.by, {
    action: `${input.machine.name}.${input.event}`,
    subjectType: input.machine.name,
    subjectId: input.id,
    companyId: input.companyId ?? null,
    detail: { from: input.from, to, ...input.detail },
  });
  return to;
}
