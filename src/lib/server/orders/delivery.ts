import { asc, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dateIn, formatDeadline } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { shipment } from '../db/schema/orders.ts';
import { requireCleanFile, shareFile } from '../files/index.ts';
import { requireRunning } from './guards.ts';
import { markSubmitted, milestoneOfKind } from './milestones.ts';
import { orderFor, piecesOf, type OrderRow } from './queries.ts';
import { movePiece } from './records.ts';
import { tell } from './tell.ts';

export type ShipmentRow = typeof shipment.$inferSelect;

export async function shipmentsOf(reader: Reader, orderId: string): Promise<ShipmentRow[]> {
  return reader.select().from(shipment).where(eq(shipment.orderId, orderId)).orderBy(asc(shipment.createdAt));
}

export interface ShipInput {
  orderId: string;
  carrier: string;
  trackingNumber: string;
  shippedOn: string;
  note: string;
  paperFileId: string | null;
  commandId: string;
}

/** The fabricator ships all accepted pieces. */
export async function shipOrder(
  db: Database,
  actor: Actor | null,
  input: ShipInput,
): Promise<{ shipmentId: string }> {
  return transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.ship', input.orderId);
    const by = actor as Actor;
    const [again] = await tx.select().from(shipment).where(eq(shipment.commandId, input.commandId));
    if (again) return { shipmentId: again.id };
    requireRunning(order);
    const milestone = await milestoneOfKind(tx, order.id, 'delivery');
    if (milestone.work !== 'open') {
      throw new AppError('state-conflict', {
        detail:
          'The delivery milestone has not started: its money is not held, or the build is not accepted yet.',
      });
    }
    const pieces = (await piecesOf(tx, order.id)).filter((p) => p.state === 'accepted');
    if (pieces.length === 0)
      throw new AppError('state-conflict', { detail: 'There is no accepted piece to ship.' });
    if (input.paperFileId) {
      await requireCleanFile(tx, input.paperFileId, {
        ownerCompanyId: order.fabricatorCompanyId,
        purpose: 'shipping-paper',
      });
      await shareFile(tx, input.paperFileId, [order.buyerCompanyId]);
    }
    for (const row of pieces) await movePiece(tx, by, row, 'ship');
    const shipmentId = newId();
    await tx.insert(shipment).values({
      id: shipmentId,
      orderId: order.id,
      carrier: input.carrier,
      trackingNumber: input.trackingNumber,
      shippedOn: input.shippedOn,
      note: input.note,
      paperFileId: input.paperFileId,
      shippedBy: by.userId,
      createdAt: await businessNow(tx),
      commandId: input.commandId,
    });
    await tell(tx, order, {
      kind: 'shipped',
      by,
      side: 'fabricator',
      milestoneId: milestone.id,
      text: `${pieces.length === 1 ? 'One piece is' : `${pieces.length} pieces are`} on the way with ${input.carrier}.`,
      subject: 'shipped',
      ...(input.note ? { paragraphs: [input.note] } : {}),
      facts: [
        ['Carrier', input.carrier],
        ['Consignment number', input.trackingNumber],
        ['Handed over on', input.shippedOn],
        ['Pieces', pieces.map((p) => p.serial).join(', ')],
      ],
      onlyBuyer: ['Confirm the receipt when it arrives; the inspection window starts then.'],
      action: 'Open the delivery',
      anchor: 'delivery',
      buyer: 'all',
      fabricator: ['builder'],
    });
    return { shipmentId };
  });
}

async function shipmentFor(
  tx: Tx,
  actor: Actor | null,
  permission: 'order.ship' | 'receipt.confirm',
  shipmentId: string,
): Promise<{ row: ShipmentRow; order: OrderRow }> {
  const [row] = await tx.select().from(shipment).where(eq(shipment.id, shipmentId));
  if (!row) throw new AppError('not-found');
  return { row, order: await orderFor(tx, actor, permission, row.orderId) };
}

/** The fabricator enters the carrier's proof of delivery; without the buyer's word the window starts days later. */
export async function enterDeliveryProof(
  db: Database,
  actor: Actor | null,
  input: { shipmentId: string; deliveredOn: string; proofFileId: string | null },
): Promise<void> {
  await transact(db, async (tx) => {
    const { row, order } = await shipmentFor(tx, actor, 'order.ship', input.shipmentId);
    const by = actor as Actor;
    requireRunning(order);
    if (row.receivedAt !== null)
      throw new AppError('state-conflict', { detail: 'The receipt is confirmed already.' });
    const now = await businessNow(tx);
    if (input.deliveredOn < row.shippedOn || input.deliveredOn > dateIn(order.buyerZone, now)) {
      throw new AppError('invalid-input', {
        fields: { deliveredOn: 'The day of delivery lies between the day of shipping and today.' },
      });
    }
    if (input.proofFileId) {
      await requireCleanFile(tx, input.proofFileId, {
        ownerCompanyId: order.fabricatorCompanyId,
        purpose: 'shipping-paper',
      });
      await shareFile(tx, input.proofFileId, [order.buyerCompanyId]);
    }
    await tx
      .update(shipment)
      .set({ deliveredOn: input.deliveredOn, deliveryProofAt: now, proofFileId: input.proofFileId })
      .where(eq(shipment.id, row.id));
    await tell(tx, order, {
      kind: 'delivery-proof',
      by,
      side: 'fabricator',
      text: `The fabricator has entered a proof of delivery of ${input.deliveredOn}.`,
      subject: 'proof of delivery entered',
      onlyBuyer: [
        `Please confirm the receipt. Without it, the inspection window starts ${order.terms.receiptDays} days after the proof.`,
      ],
      action: 'Confirm the receipt',
      anchor: 'delivery',
      buyer: 'all',
      fabricator: ['builder'],
    });
  });
}

/** The buyer confirms the receipt: the delivery milestone is submitted and its window starts. */
export async function confirmReceipt(
  db: Database,
  actor: Actor | null,
  input: { shipmentId: string; note: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const { row, order } = await shipmentFor(tx, actor, 'receipt.confirm', input.shipmentId);
    requireRunning(order);
    await markReceived(tx, actor as Actor, order, row, input.note.trim());
  });
}

/** The common end of a delivery: by the buyer's word, or by itself after the proof of delivery. */
export async function markReceived(
  tx: Tx,
  by: By,
  order: OrderRow,
  row: ShipmentRow,
  note: string,
): Promise<void> {
  if (row.receivedAt !== null)
    throw new AppError('state-conflict', { detail: 'The receipt is confirmed already.' });
  const milestone = await milestoneOfKind(tx, order.id, 'delivery');
  await tx
    .update(shipment)
    .set({
      receivedAt: await businessNow(tx),
      receivedBy: by === 'system' ? null : by.userId,
      receivedNote: note,
    })
    .where(eq(shipment.id, row.id));
  for (const p of await piecesOf(tx, order.id))
    if (p.state === 'shipped') await movePiece(tx, by, p, 'deliver');
  const windowEndsAt = await markSubmitted(tx, by, order, milestone);
  await tell(tx, order, {
    kind: 'received',
    by,
    side: by === 'system' ? null : 'buyer',
    milestoneId: milestone.id,
    text:
      by === 'system'
        ? 'The receipt was not confirmed in time after the proof of delivery; the inspection window has started.'
        : 'The buyer has confirmed the receipt.',
    subject: 'received',
    ...(note ? { paragraphs: [note] } : {}),
    facts: [['Inspection window ends', formatDeadline(windowEndsAt, order.buyerZone)]],
    onlyBuyer: [
      'Inspect the delivery within the window. Release it, return it with reasons, or open a dispute; otherwise the money is released when the window ends.',
    ],
    action: 'Open the delivery',
    anchor: 'delivery',
    buyer: ['engineer', 'purchaser'],
    fabricator: ['builder', 'estimator'],
  });
}
