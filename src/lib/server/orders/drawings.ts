import { and, asc, count, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { formatDeadline, formatInstant } from '../../domain/dates.ts';
import { drawingMachine, revisionLetter } from '../../domain/drawing-states.ts';
import { AppError } from '../../domain/errors.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { drawingRevision } from '../db/schema/orders.ts';
import { transition } from '../db/transition.ts';
import { requireCleanFile, shareFile } from '../files/index.ts';
import { requireRunning } from './guards.ts';
import { markAccepted, markSubmitted, milestoneOfKind } from './milestones.ts';
import { orderFor, unsafeMilestone, type OrderRow } from './queries.ts';
import { tell } from './tell.ts';

export type DrawingRow = typeof drawingRevision.$inferSelect;

export async function drawingsOf(reader: Reader, orderId: string): Promise<DrawingRow[]> {
  return reader
    .select()
    .from(drawingRevision)
    .where(eq(drawingRevision.orderId, orderId))
    .orderBy(asc(drawingRevision.submittedAt), asc(drawingRevision.id));
}

/** The next revision of the drawing; a revision still waiting for an answer is replaced by it. */
export async function submitDrawing(
  db: Database,
  actor: Actor | null,
  input: { orderId: string; fileId: string; note: string; commandId: string },
): Promise<{ revisionId: string; letter: string }> {
  return transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'drawing.submit', input.orderId);
    const by = actor as Actor;
    const [again] = await tx
      .select()
      .from(drawingRevision)
      .where(eq(drawingRevision.commandId, input.commandId));
    if (again) return { revisionId: again.id, letter: again.letter };
    requireRunning(order);
    const milestone = await milestoneOfKind(tx, order.id, 'drawing');
    if (milestone.work !== 'open') {
      throw new AppError('state-conflict', {
        detail:
          milestone.work === 'planned'
            ? 'The drawing milestone has not started: its money is not held yet.'
            : 'The drawing is approved already.',
      });
    }
    const file = await requireCleanFile(tx, input.fileId, {
      ownerCompanyId: order.fabricatorCompanyId,
      purpose: 'coil-drawing',
    });
    await shareFile(tx, file.id, [order.buyerCompanyId]);
    for (const earlier of await drawingsOf(tx, order.id)) {
      if (earlier.state === 'submitted') await moveDrawing(tx, by, earlier, 'supersede', {});
    }
    const [made] = await tx
      .select({ number: count() })
      .from(drawingRevision)
      .where(eq(drawingRevision.orderId, order.id));
    const letter = revisionLetter(made?.number ?? 0);
    const revisionId = newId();
    await tx.insert(drawingRevision).values({
      id: revisionId,
      orderId: order.id,
      letter,
      fileId: file.id,
      note: input.note,
      state: 'submitted',
      sha256: file.sha256,
      submittedBy: by.userId,
      submittedAt: await businessNow(tx),
      commandId: input.commandId,
    });
    await tell(tx, order, {
      kind: 'drawing-submitted',
      by,
      side: 'fabricator',
      milestoneId: milestone.id,
      text: `Drawing revision ${letter} was submitted for approval.`,
      subject: `drawing revision ${letter} to judge`,
      ...(input.note ? { paragraphs: [`Note of the fabricator: ${input.note}`] } : {}),
      facts: [['File', file.name]],
      action: 'Look at the drawing',
      anchor: 'drawings',
      buyer: ['engineer'],
      fabricator: ['builder'],
    });
    return { revisionId, letter };
  });
}

async function moveDrawing(
  tx: Tx,
  by: Actor,
  row: DrawingRow,
  event: 'approve' | 'request-changes' | 'supersede',
  set: Partial<typeof drawingRevision.$inferInsert>,
  expectedVersion?: number,
): Promise<void> {
  await transition(tx, {
    machine: drawingMachine,
    table: drawingRevision,
    column: drawingRevision.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
    set,
    ...(expectedVersion === undefined ? {} : { expectedVersion }),
  });
}

/**
 * The buyer approves a revision (named with person, time and hash; this submits and accepts the drawing
 * milestone) or asks for changes with reasons. Silence never approves.
 */
export async function judgeDrawing(
  db: Database,
  actor: Actor | null,
  input: { revisionId: string; decision: 'approve' | 'request-changes'; reasons: string; version?: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const [row] = await tx.select().from(drawingRevision).where(eq(drawingRevision.id, input.revisionId));
    if (!row) throw new AppError('not-found');
    const order = await orderFor(tx, actor, 'drawing.judge', row.orderId);
    const by = actor as Actor;
    requireRunning(order);
    const reasons = input.reasons.trim();
    if (input.decision === 'request-changes' && reasons === '') {
      throw new AppError('invalid-input', { fields: { reasons: 'Say what has to change.' } });
    }
    const now = await businessNow(tx);
    await moveDrawing(
      tx,
      by,
      row,
      input.decision,
      { judgedBy: by.userId, judgedAt: now, reasons },
      input.version,
    );
    if (input.decision === 'approve') await approved(tx, by, order, row, now);
    else {
      await tell(tx, order, {
        kind: 'changes-requested',
        by,
        side: 'buyer',
        text: `Changes of drawing revision ${row.letter} were requested.`,
        subject: `changes of drawing revision ${row.letter} requested`,
        paragraphs: [reasons],
        action: 'Open the drawings',
        anchor: 'drawings',
        buyer: ['engineer'],
        fabricator: ['builder'],
      });
    }
  });
}

async function approved(tx: Tx, by: Actor, order: OrderRow, row: DrawingRow, now: number): Promise<void> {
  const milestone = await milestoneOfKind(tx, order.id, 'drawing');
  const windowEndsAt = await markSubmitted(tx, by, order, milestone);
  await tell(tx, order, {
    kind: 'drawing-approved',
    by,
    side: 'buyer',
    milestoneId: milestone.id,
    text: `Drawing revision ${row.letter} was approved.`,
    subject: `drawing revision ${row.letter} approved`,
    facts: [
      ['Approved by', by.name],
      ['At', formatInstant(now, order.buyerZone)],
      ['SHA-256 of the file', row.sha256],
      ['Released at the latest', formatDeadline(windowEndsAt, order.buyerZone)],
    ],
    action: 'Open the order',
    anchor: 'drawings',
    buyer: ['engineer', 'purchaser'],
    fabricator: ['builder', 'estimator'],
  });
  await markAccepted(tx, by, await unsafeMilestone(tx, milestone.id));
}

/** The approved revision, if there is one. */
export async function approvedDrawing(reader: Reader, orderId: string): Promise<DrawingRow | undefined> {
  const [row] = await reader
    .select()
    .from(drawingRevision)
    .where(and(eq(drawingRevision.orderId, orderId), eq(drawingRevision.state, 'approved')));
  return row;
}
