import type { Actor } from '../../domain/actor.ts';
import { formatDeadline } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { By } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { milestoneReturn } from '../db/schema/orders.ts';
import { requireNoDispute, requireRunning } from './guards.ts';
import { markAccepted, markSubmitted, moveWork } from './milestones.ts';
import {
  milestoneFor,
  openDisputesOf,
  piecesOf,
  unsafeMilestone,
  type MilestoneRow,
  type OrderRow,
} from './queries.ts';
import { latestRecord, movePiece, moveRecord, recordsOf } from './records.ts';
import { tell } from './tell.ts';

/** What still keeps the build from being submitted, in words; empty when nothing does. */
export async function buildGaps(tx: Tx, orderId: string): Promise<string[]> {
  const pieces = (await piecesOf(tx, orderId)).filter(
    (p) => p.state !== 'replaced' && p.state !== 'cancelled',
  );
  return pieces
    .filter((p) => p.state === 'planned' || p.state === 'missed')
    .map((p) => `${p.serial}: ${p.state === 'planned' ? 'no record' : 'outside its limits'}`);
}

/** The fabricator submits the material or build milestone with its evidence; the window starts. */
export async function submitMilestone(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string; note: string; version?: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'record.enter', input.milestoneId);
    const by = actor as Actor;
    requireRunning(order);
    requireNoDispute(await openDisputesOf(tx, { milestoneId: milestone.id }));
    if (milestone.kind === 'drawing' || milestone.kind === 'delivery') {
      throw new AppError('state-conflict', {
        detail: 'The drawing is submitted by its approval, the delivery by its receipt.',
      });
    }
    if (milestone.kind === 'build') {
      const gaps = await buildGaps(tx, order.id);
      if (gaps.length > 0) {
        throw new AppError('state-conflict', {
          detail: `Records are missing or outside limits: ${gaps.join('; ')}.`,
        });
      }
    } else if (!input.note.trim()) {
      throw new AppError('invalid-input', {
        fields: { note: 'Say what was bought, with certificate numbers.' },
      });
    }
    if (input.version !== undefined && input.version !== milestone.version)
      throw new AppError('version-conflict');
    const windowEndsAt = await markSubmitted(tx, by, order, milestone);
    await tellSubmitted(tx, by, order, milestone, windowEndsAt, input.note.trim());
  });
}

/** Tells both sides that a milestone is submitted and until when it can be judged. */
export async function tellSubmitted(
  tx: Tx,
  by: By,
  order: OrderRow,
  milestone: MilestoneRow,
  windowEndsAt: number,
  note = '',
): Promise<void> {
  const name = milestoneKindText[milestone.kind];
  await tell(tx, order, {
    kind: 'milestone-submitted',
    by,
    side: by === 'system' ? null : 'fabricator',
    milestoneId: milestone.id,
    text: `The ${name.toLowerCase()} milestone was submitted.`,
    subject: `${name.toLowerCase()} submitted`,
    ...(note ? { paragraphs: [note] } : {}),
    facts: [['Inspection window ends', formatDeadline(windowEndsAt, order.buyerZone)]],
    onlyBuyer: [
      'Release it, or return it with reasons, or open a dispute. When the window ends without any of these, the money is released.',
    ],
    action: 'Open the milestone',
    anchor: `milestone-${milestone.id}`,
    buyer: ['engineer', 'purchaser'],
    fabricator: ['builder', 'estimator'],
  });
}

/** The buyer sends a submission back with reasons; it is counted, and the money stays held. */
export async function returnSubmission(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string; reasons: string; version?: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'record.judge', input.milestoneId);
    const by = actor as Actor;
    requireRunning(order);
    const reasons = input.reasons.trim();
    if (!reasons)
      throw new AppError('invalid-input', { fields: { reasons: 'Say what is missing or wrong.' } });
    requireNoDispute(await openDisputesOf(tx, { milestoneId: milestone.id }));
    if (milestone.money !== 'held') {
      throw new AppError('state-conflict', { detail: 'The money of this milestone is no longer held.' });
    }
    const number = milestone.returnedCount + 1;
    await moveWork(
      tx,
      by,
      milestone,
      'return',
      { returnedCount: number, submittedAt: null, windowEndsAt: null },
      input.version,
    );
    await tx.insert(milestoneReturn).values({
      id: newId(),
      milestoneId: milestone.id,
      number,
      reasons,
      returnedBy: by.userId,
      at: await businessNow(tx),
    });
    if (milestone.kind === 'build') await reopenPieces(tx, by, order.id, reasons);
    const name = milestoneKindText[milestone.kind].toLowerCase();
    await tell(tx, order, {
      kind: 'submission-returned',
      by,
      side: 'buyer',
      milestoneId: milestone.id,
      text: `The ${name} milestone was returned (${number}.). Its money stays held.`,
      subject: `${name} returned`,
      paragraphs: [reasons],
      action: 'Open the milestone',
      anchor: `milestone-${milestone.id}`,
      buyer: ['engineer', 'purchaser'],
      fabricator: ['builder', 'estimator'],
    });
  });
}

async function reopenPieces(tx: Tx, by: Actor, orderId: string, reasons: string): Promise<void> {
  const records = await recordsOf(tx, orderId);
  for (const row of await piecesOf(tx, orderId)) {
    if (row.state !== 'measured') continue;
    const record = latestRecord(records, row.id);
    if (record?.state === 'submitted') await moveRecord(tx, by, record, 'return', reasons);
    await movePiece(tx, by, row, 'return');
  }
}

/** Records and pieces of an accepted build are accepted with it. */
export async function acceptPieces(tx: Tx, by: By, orderId: string): Promise<void> {
  const records = await recordsOf(tx, orderId);
  for (const row of await piecesOf(tx, orderId)) {
    if (row.state !== 'measured') continue;
    const record = latestRecord(records, row.id);
    if (record?.state === 'submitted' && by !== 'system') await moveRecord(tx, by, record, 'accept');
    await movePiece(tx, by, row, 'accept');
  }
}

/** Accepts a submitted milestone and what hangs on it, in the caller's transaction. */
export async function acceptWork(
  tx: Tx,
  by: By,
  milestoneId: string,
  expectedVersion?: number,
): Promise<void> {
  const row = await unsafeMilestone(tx, milestoneId);
  if (row.kind === 'build') await acceptPieces(tx, by, row.orderId);
  await markAccepted(tx, by, row, expectedVersion);
}

/** The buyer's engineer accepts the evidence; the next milestone may start. The money waits for its release. */
export async function acceptSubmission(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string; version?: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'record.judge', input.milestoneId);
    const by = actor as Actor;
    requireRunning(order);
    requireNoDispute(await openDisputesOf(tx, { milestoneId: milestone.id }));
    await acceptWork(tx, by, milestone.id, input.version);
    const name = milestoneKindText[milestone.kind].toLowerCase();
    await tell(tx, order, {
      kind: 'milestone-accepted',
      by,
      side: 'buyer',
      milestoneId: milestone.id,
      text: `The ${name} milestone was accepted.`,
      subject: `${name} accepted`,
      onlyBuyer: [
        'Its money can be released now; at the latest it goes out when the inspection window ends.',
      ],
      action: 'Open the milestone',
      anchor: `milestone-${milestone.id}`,
      buyer: ['purchaser'],
      fabricator: ['builder', 'estimator'],
    });
  });
}
