import { disputeMachine } from '../../domain/dispute-states.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { dispute } from '../db/schema/disputes.ts';
import { transition } from '../db/transition.ts';
import type { DisputeRow } from './queries.ts';

type DisputeEvent = (typeof disputeMachine)['transitions'][number]['event'];

export async function moveDispute(
  tx: Tx,
  by: By,
  row: DisputeRow,
  event: DisputeEvent,
  set: Partial<typeof dispute.$inferInsert> = {},
  expectedVersion?: number,
): Promise<void> {
  await transition(tx, {
    machine: disputeMachine,
    table: dispute,
    column: dispute.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
    set,
    ...(expectedVersion === undefined ? {} : { expectedVersion }),
  });
}
