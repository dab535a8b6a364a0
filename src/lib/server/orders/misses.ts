import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dateIn } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { asBuiltRecord, coilOrder, milestone, piece } from '../db/schema/orders.ts';
import { requireNoDispute, requireRunning } from './guards.ts';
import { milestoneOfKind } from './milestones.ts';
import { openDisputesOf, orderFor, piecesOf, type OrderRow, type PieceRow } from './queries.ts';
import { movePiece, moveRecord, type RecordRow } from './records.ts';
import { tell } from './tell.ts';

async function missedRecord(
  tx: Tx,
  actor: Actor | null,
  recordId: string,
): Promise<{ record: RecordRow; row: PieceRow; order: OrderRow; by: Actor }> {
  const [record] = await tx.select().from(asBuiltRecord).where(eq(asBuiltRecord.id, recordId));
  if (!record) throw new AppError('not-found');
  const order = await orderFor(tx, actor, 'record.judge', record.orderId);
  const [row] = await tx.select().from(piece).where(eq(piece.id, record.pieceId));
  if (!row) throw new AppError('not-found');
  requireRunning(order);
  requireNoDispute(await openDisputesOf(tx, { orderId: order.id }));
  if (record.verdict !== 'fail' || row.state !== 'missed') {
    throw new AppError('state-conflict', { detail: 'This record is not an open miss.' });
  }
  return { record, row, order, by: actor as Actor };
}

/** The buyer takes a piece although a line missed its limits, with a reason. */
export async function concedeMiss(
  db: Database,
  actor: Actor | null,
  input: { recordId: string; reasons: string },
): Promise<void> {
  await transact(db, async (tx) => {
    const { record, row, order, by } = await missedRecord(tx, actor, input.recordId);
    const reasons = input.reasons.trim();
    if (!reasons)
      throw new AppError('invalid-input', { fields: { reasons: 'Say why the miss is acceptable.' } });
    await moveRecord(tx, by, record, 'concede', reasons);
    await movePiece(tx, by, row, 'accept');
    await tell(tx, order, {
      kind: 'as-built-conceded',
      by,
      side: 'buyer',
      text: `The miss of piece ${row.serial} was accepted by the buyer.`,
      subject: `miss of ${row.serial} accepted`,
      paragraphs: [reasons],
      action: 'Open the order',
      anchor: 'pieces',
      buyer: ['engineer', 'purchaser'],
      fabricator: ['builder', 'estimator'],
    });
  });
}

/** The buyer has a missed piece made anew at the fabricator's cost, by a new date; the old record stays. */
export async function askRemake(
  db: Database,
  actor: Actor | null,
  input: { recordId: string; reasons: string; dueDate: string },
): Promise<{ pieceId: string }> {
  return transact(db, async (tx) => {
    const { record, row, order, by } = await missedRecord(tx, actor, input.recordId);
    const now = await businessNow(tx);
    if (input.dueDate <= dateIn(order.buyerZone, now)) {
      throw new AppError('invalid-input', { fields: { dueDate: 'The new date has to lie ahead.' } });
    }
    await moveRecord(tx, by, record, 'return', input.reasons.trim());
    await movePiece(tx, by, row, 'replace');
    const pieces = (await piecesOf(tx, order.id)).filter((p) => p.kind === row.kind);
    const position = Math.max(...pieces.map((p) => p.position)) + 1;
    const pieceId = newId();
    await tx.insert(piece).values({
      id: pieceId,
      orderId: order.id,
      kind: row.kind,
      position,
      serial: `${order.number}-${row.kind === 'coil' ? '' : 'F'}${position}`,
      state: 'planned',
      replacesPieceId: row.id,
      createdAt: now,
    });
    const build = await milestoneOfKind(tx, order.id, 'build');
    await tx.update(milestone).set({ dueDate: input.dueDate }).where(eq(milestone.id, build.id));
    await tx.update(coilOrder).set({ dueDate: input.dueDate }).where(eq(coilOrder.id, order.id));
    await tell(tx, order, {
      kind: 'as-built-returned',
      by,
      side: 'buyer',
      milestoneId: build.id,
      text: `Piece ${row.serial} is to be made anew at the fabricator’s cost.`,
      subject: `${row.serial} to be made anew`,
      ...(input.reasons.trim() ? { paragraphs: [input.reasons.trim()] } : {}),
      facts: [['New date', input.dueDate]],
      action: 'Open the order',
      anchor: 'pieces',
      buyer: ['engineer', 'purchaser'],
      fabricator: ['builder', 'estimator'],
    });
    return { pieceId };
  });
}
