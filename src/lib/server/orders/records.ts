import { asc, count, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { AsBuiltBody } from '../../domain/as-built.ts';
import { AppError } from '../../domain/errors.ts';
import { pieceMachine, recordMachine, verdictText, type Verdict } from '../../domain/piece-states.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { asBuiltFile, asBuiltRecord, piece } from '../db/schema/orders.ts';
import { transition } from '../db/transition.ts';
import { enqueueJob } from '../jobs/index.ts';
import { requireCleanFile, shareFile } from '../files/index.ts';
import { asBuiltOutcomeJob } from './as-built-outcome.ts';
import { requireRunning } from './guards.ts';
import { milestoneOfKind } from './milestones.ts';
import { orderFor, orderSpecificationOf, type PieceRow } from './queries.ts';
import { judgeRecord } from './rules.ts';
import { acceptanceLines } from './specification.ts';
import { tell } from './tell.ts';

export type RecordRow = typeof asBuiltRecord.$inferSelect;
type PieceEvent = (typeof pieceMachine)['transitions'][number]['event'];

export async function recordsOf(reader: Reader, orderId: string): Promise<RecordRow[]> {
  return reader
    .select()
    .from(asBuiltRecord)
    .where(eq(asBuiltRecord.orderId, orderId))
    .orderBy(asc(asBuiltRecord.enteredAt), asc(asBuiltRecord.id));
}

export async function movePiece(tx: Tx, by: By, row: PieceRow, event: PieceEvent): Promise<void> {
  await transition(tx, {
    machine: pieceMachine,
    table: piece,
    column: piece.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
  });
}

export async function moveRecord(
  tx: Tx,
  by: Actor,
  row: RecordRow,
  event: 'return' | 'accept' | 'concede',
  reasons = '',
): Promise<void> {
  await transition(tx, {
    machine: recordMachine,
    table: asBuiltRecord,
    column: asBuiltRecord.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
    set: { judgedBy: by.userId, judgedAt: await businessNow(tx), reasons },
  });
}

export interface EnterRecordInput {
  pieceId: string;
  body: AsBuiltBody;
  photos: string[];
  certificates: string[];
  commandId: string;
}

/**
 * Enters the as-built record of a piece and judges it against the order specification. A miss is told
 * to the buyer, who concedes, lets remake, or ends; nothing is hidden or overwritten.
 */
export async function enterRecord(
  db: Database,
  actor: Actor | null,
  input: EnterRecordInput,
): Promise<{ recordId: string; verdict: Verdict }> {
  return transact(db, async (tx) => {
    const [row] = await tx.select().from(piece).where(eq(piece.id, input.pieceId));
    if (!row) throw new AppError('not-found');
    const order = await orderFor(tx, actor, 'record.enter', row.orderId);
    const by = actor as Actor;
    const [again] = await tx.select().from(asBuiltRecord).where(eq(asBuiltRecord.commandId, input.commandId));
    if (again) return { recordId: again.id, verdict: again.verdict };
    requireRunning(order);
    const build = await milestoneOfKind(tx, order.id, 'build');
    if (build.work !== 'open') {
      throw new AppError('state-conflict', {
        detail: 'Records are entered while the build milestone is open.',
      });
    }
    const specification = await orderSpecificationOf(tx, order.id);
    const judged = judgeRecord(acceptanceLines(specification.body), input.body);
    const [made] = await tx
      .select({ number: count() })
      .from(asBuiltRecord)
      .where(eq(asBuiltRecord.pieceId, row.id));
    const attempt = (made?.number ?? 0) + 1;
    await movePiece(tx, by, row, judged.verdict === 'fail' ? 'miss' : 'measure');
    const recordId = newId();
    await tx.insert(asBuiltRecord).values({
      id: recordId,
      orderId: order.id,
      pieceId: row.id,
      attempt,
      body: input.body,
      verdicts: judged.lines,
      verdict: judged.verdict,
      state: 'submitted',
      specificationHash: specification.hash,
      enteredBy: by.userId,
      enteredAt: await businessNow(tx),
      commandId: input.commandId,
    });
    await attachFiles(tx, recordId, order, input);
    await enqueueJob(tx, asBuiltOutcomeJob, { recordId }, { dedupeKey: recordId });
    const misses = judged.lines.filter((line) => line.verdict === 'fail');
    await tell(tx, order, {
      kind: 'as-built-submitted',
      by,
      side: 'fabricator',
      milestoneId: build.id,
      text: `The as-built record of piece ${row.serial} (attempt ${attempt}) was entered: ${verdictText[judged.verdict]}.`,
      subject: `as-built record of ${row.serial}: ${verdictText[judged.verdict]}`,
      facts: misses.map((line): [string, string] => [line.label, line.remark]),
      onlyBuyer:
        misses.length > 0
          ? ['The piece is outside its limits. You may accept it as it is, or ask for it to be made anew.']
          : [],
      action: 'Look at the record',
      anchor: 'pieces',
      buyer: ['engineer'],
      fabricator: ['builder'],
    });
    return { recordId, verdict: judged.verdict };
  });
}

async function attachFiles(
  tx: Tx,
  recordId: string,
  order: { fabricatorCompanyId: string; buyerCompanyId: string },
  input: EnterRecordInput,
): Promise<void> {
  const kinds = [
    { ids: input.photos, kind: 'photo', purpose: 'as-built-photo' },
    { ids: input.certificates, kind: 'certificate', purpose: 'certificate' },
  ] as const;
  for (const { ids, kind, purpose } of kinds) {
    for (const fileId of new Set(ids)) {
      await requireCleanFile(tx, fileId, { ownerCompanyId: order.fabricatorCompanyId, purpose });
      await shareFile(tx, fileId, [order.buyerCompanyId]);
      await tx.insert(asBuiltFile).values({ recordId, fileId, kind }).onConflictDoNothing();
    }
  }
}

/** Records of an order by piece, newest attempt last. */
export function latestRecord(records: readonly RecordRow[], pieceId: string): RecordRow | undefined {
  return records.filter((record) => record.pieceId === pieceId).at(-1);
}
