import { asc, eq } from 'drizzle-orm';
import { waitsOf, type Wait, type WaitFacts } from '../../domain/waits.ts';
import type { Reader } from '../db/index.ts';
import { dispute } from '../db/schema/disputes.ts';
import { shipmentsOf } from './delivery.ts';
import { drawingsOf } from './drawings.ts';
import { milestonesOf, piecesOf, type OrderRow } from './queries.ts';
import { latestRecord, recordsOf } from './records.ts';

/** All that the waits of an order depend on. */
export async function waitFacts(reader: Reader, order: OrderRow): Promise<WaitFacts> {
  const pieces = await piecesOf(reader, order.id);
  const records = await recordsOf(reader, order.id);
  const drawing = (await drawingsOf(reader, order.id)).find((row) => row.state === 'submitted');
  const disputes = await reader
    .select()
    .from(dispute)
    .where(eq(dispute.orderId, order.id))
    .orderBy(asc(dispute.openedAt));
  return {
    order,
    milestones: await milestonesOf(reader, order.id),
    drawing: drawing ?? null,
    misses: pieces.flatMap((row) => {
      const record = latestRecord(records, row.id);
      return row.state === 'missed' && record?.state === 'submitted'
        ? [{ id: record.id, serial: row.serial, enteredAt: record.enteredAt }]
        : [];
    }),
    shipment: (await shipmentsOf(reader, order.id)).at(-1) ?? null,
    disputes: disputes.map((row) => ({
      ...row,
      openedBy: row.openedByCompanyId === order.buyerCompanyId ? ('buyer' as const) : ('fabricator' as const),
    })),
  };
}

/** Who must do what by when, and what happens otherwise; the nearest first. */
export async function orderWaits(reader: Reader, order: OrderRow): Promise<Wait[]> {
  return waitsOf(await waitFacts(reader, order));
}
