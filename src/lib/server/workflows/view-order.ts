import { asc, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates, type DisputeState } from '../../domain/dispute-states.ts';
import { attentionText, milestoneWord } from '../../domain/milestone-states.ts';
import { actOfWait, groundsFor, presentWaits, waitsOf } from '../../domain/waits.ts';
import { can } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { asBuiltFile, milestoneReturn, orderEvent } from '../db/schema/orders.ts';
import { unsafeDisputesOfOrder } from '../disputes/index.ts';
import { unsafeFileFacts } from '../files/index.ts';
import { listMessages } from '../messages/index.ts';
import { booksOf, fundingObstacle, payoutReady, releaseObstacle } from '../money/index.ts';
import {
  acceptanceLines,
  drawingsOf,
  milestonesOf,
  orderFor,
  orderNumberText,
  orderSpecificationOf,
  parties,
  piecesOf,
  recordsOf,
  shipmentsOf,
  sideOf,
  waitFacts,
  type MilestoneRow,
  type OrderRow,
} from '../orders/index.ts';
import { endProposalsOf } from './end-proposals.ts';

/** What the person may do in this order, by permission; the state is checked by each act again. */
function rightsOf(actor: Actor, order: OrderRow) {
  const object = parties(order);
  return {
    acknowledge: can(actor, 'order.acknowledge', object),
    fund: can(actor, 'milestone.fund', object),
    release: can(actor, 'milestone.release', object),
    judgeDrawing: can(actor, 'drawing.judge', object),
    judgeRecord: can(actor, 'record.judge', object),
    submitDrawing: can(actor, 'drawing.submit', object),
    enterRecord: can(actor, 'record.enter', object),
    ship: can(actor, 'order.ship', object),
    confirmReceipt: can(actor, 'receipt.confirm', object),
    dispute: can(actor, 'order.dispute', object),
    end: can(actor, 'order.end', object),
    message: can(actor, 'order.message', object),
  };
}

async function namesOf(reader: Reader, ids: readonly (string | null)[]): Promise<Map<string, string>> {
  const wanted = [...new Set(ids.filter((id): id is string => id !== null))];
  if (wanted.length === 0) return new Map();
  const rows = await reader
    .select({ id: user.id, name: user.name })
    .from(user)
    .where(inArray(user.id, wanted));
  return new Map(rows.map((row) => [row.id, row.name]));
}

async function milestoneViews(reader: Reader, actor: Actor, order: OrderRow, rows: MilestoneRow[]) {
  const ids = rows.map((row) => row.id);
  const books = await booksOf(reader, ids);
  const returns = await reader
    .select()
    .from(milestoneReturn)
    .where(inArray(milestoneReturn.milestoneId, ids))
    .orderBy(asc(milestoneReturn.number));
  const disputes = await unsafeDisputesOfOrder(reader, order.id);
  const rights = rightsOf(actor, order);
  const running = order.state === 'running';
  return rows.map((row) => {
    const dispute = disputes.find((d) => d.milestoneId === row.id && openDisputeStates.includes(d.state));
    const state: DisputeState | null = dispute?.state ?? null;
    const held = row.money === 'held';
    return {
      id: row.id,
      kind: row.kind,
      amount: row.amount,
      work: row.work,
      money: row.money,
      ...milestoneWord(row.work, row.money, state),
      attention: row.attention === null ? null : attentionText[row.attention],
      dueDate: row.dueDate,
      submittedAt: row.submittedAt,
      windowEndsAt: row.windowEndsAt,
      returnedCount: row.returnedCount,
      version: row.version,
      returns: returns
        .filter((r) => r.milestoneId === row.id)
        .map(({ number, reasons, at }) => ({ number, reasons, at })),
      books: books.get(row.id) ?? { funded: 0, released: 0, fees: 0, refunded: 0, chargedBack: 0, held: 0 },
      disputeId: dispute?.id ?? null,
      may: {
        fund: rights.fund && fundingObstacle(order, row) === null,
        release: rights.release && releaseObstacle(order, row, state !== null) === null,
        accept: rights.judgeRecord && running && held && row.work === 'submitted' && !dispute,
        return: rights.judgeRecord && running && held && row.work === 'submitted' && !dispute,
        submit:
          rights.enterRecord &&
          running &&
          held &&
          row.work === 'open' &&
          !dispute &&
          (row.kind === 'build' || row.kind === 'material'),
        dispute: rights.dispute && held && !dispute && order.state !== 'ended' && order.state !== 'done',
      },
    };
  });
}

async function pieceViews(reader: Reader, order: OrderRow, names: Map<string, string>) {
  const records = await recordsOf(reader, order.id);
  const links =
    records.length === 0
      ? []
      : await reader
          .select()
          .from(asBuiltFile)
          .where(
            inArray(
              asBuiltFile.recordId,
              records.map((row) => row.id),
            ),
          );
  const facts = await unsafeFileFacts(
    reader,
    links.map((link) => link.fileId),
  );
  return (await piecesOf(reader, order.id)).map((row) => ({
    id: row.id,
    kind: row.kind,
    serial: row.serial,
    state: row.state,
    records: records
      .filter((record) => record.pieceId === row.id)
      .map((record) => ({
        id: record.id,
        attempt: record.attempt,
        verdict: record.verdict,
        state: record.state,
        lines: record.verdicts,
        body: record.body,
        outcome: record.outcome,
        enteredAt: record.enteredAt,
        enteredBy: names.get(record.enteredBy) ?? '',
        reasons: record.reasons,
        files: links
          .filter((link) => link.recordId === record.id)
          .flatMap((link) => facts.filter((f) => f.id === link.fileId))
          .map(({ id, name, size }) => ({ id, name, size })),
      })),
  }));
}

/** Everything the order room shows to this person. */
export async function viewOrder(reader: Reader, actor: Actor | null, orderId: string) {
  const order = await orderFor(reader, actor, 'order.view', orderId);
  const person = actor as Actor;
  const now = await businessNow(reader);
  const side = sideOf(person, 'order.view', order) ?? 'buyer';
  const rows = await milestonesOf(reader, order.id);
  const waits = waitsOf(await waitFacts(reader, order));
  const drawings = await drawingsOf(reader, order.id);
  const records = await recordsOf(reader, order.id);
  const events = await reader
    .select()
    .from(orderEvent)
    .where(eq(orderEvent.orderId, order.id))
    .orderBy(asc(orderEvent.at), asc(orderEvent.id));
  const proposals = await endProposalsOf(reader, order.id);
  const names = await namesOf(reader, [
    ...drawings.flatMap((row) => [row.submittedBy, row.judgedBy]),
    ...records.map((row) => row.enteredBy),
    ...events.map((row) => row.userId),
    ...proposals.map((row) => row.proposedBy),
  ]);
  const shipments = await shipmentsOf(reader, order.id);
  const files = await unsafeFileFacts(reader, [
    ...drawings.map((row) => row.fileId),
    ...shipments
      .flatMap((row) => [row.paperFileId, row.proofFileId])
      .filter((id): id is string => id !== null),
  ]);
  const fileOf = (id: string | null) => {
    const found = files.find((f) => f.id === id);
    return found
      ? { id: found.id, name: found.name, contentType: found.contentType, size: found.size }
      : null;
  };
  const specification = await orderSpecificationOf(reader, order.id);
  const disputes = await unsafeDisputesOfOrder(reader, order.id);
  const rights = rightsOf(person, order);
  return {
    now,
    side,
    zone: person.timeZone,
    unitSet: person.unitSet,
    rights,
    emailVerified: person.emailVerified,
    order: {
      id: order.id,
      number: orderNumberText(order),
      title: order.title,
      state: order.state,
      requestId: order.requestId,
      buyerName: order.buyerName,
      fabricatorName: order.fabricatorName,
      buyerCompanyId: order.buyerCompanyId,
      fabricatorCompanyId: order.fabricatorCompanyId,
      currency: order.currency,
      netAmount: order.netAmount,
      taxAmount: order.taxAmount,
      freightAmount: order.freightAmount,
      totalAmount: order.totalAmount,
      feeBasisPoints: order.feeBasisPoints,
      quantity: order.quantity,
      inspectionDays: order.inspectionDays,
      buyerZone: order.buyerZone,
      leadTimeWorkingDays: order.leadTimeWorkingDays,
      dueDate: order.dueDate,
      needBy: order.needBy,
      awardedAt: order.awardedAt,
      acknowledgedAt: order.acknowledgedAt,
      clockStopped: order.clockStoppedAt !== null,
      endReason: order.endReason,
    },
    payoutReady: await payoutReady(reader, order.fabricatorCompanyId),
    specification: {
      number: specification.number,
      hash: specification.hash,
      acceptance: acceptanceLines(specification.body),
    },
    waits: presentWaits(waits, now).map((wait) => ({
      kind: wait.kind,
      owner: wait.owner,
      ownerName:
        wait.owner === 'platform'
          ? 'The platform'
          : wait.owner === 'buyer'
            ? order.buyerName
            : order.fabricatorName,
      what: wait.what,
      dueAt: wait.dueAt,
      late: wait.dueAt !== null && wait.dueAt <= now,
      otherwise: wait.otherwise,
      anchor: wait.anchor,
      mine: wait.owner === side && can(person, actOfWait[wait.kind], parties(order)),
    })),
    grounds: rights.end || rights.acknowledge ? groundsFor(waits, side, now) : [],
    milestones: await milestoneViews(reader, person, order, rows),
    drawings: drawings.map((row) => ({
      id: row.id,
      letter: row.letter,
      note: row.note,
      state: row.state,
      sha256: row.sha256,
      submittedAt: row.submittedAt,
      submittedBy: names.get(row.submittedBy) ?? '',
      judgedAt: row.judgedAt,
      judgedBy: row.judgedBy === null ? null : (names.get(row.judgedBy) ?? ''),
      reasons: row.reasons,
      version: row.version,
      file: fileOf(row.fileId),
    })),
    pieces: await pieceViews(reader, order, names),
    shipments: shipments.map((row) => ({
      id: row.id,
      carrier: row.carrier,
      trackingNumber: row.trackingNumber,
      shippedOn: row.shippedOn,
      note: row.note,
      paper: fileOf(row.paperFileId),
      deliveredOn: row.deliveredOn,
      proof: fileOf(row.proofFileId),
      receivedAt: row.receivedAt,
      receivedNote: row.receivedNote,
    })),
    disputes: disputes.map((row) => ({
      id: row.id,
      milestoneId: row.milestoneId,
      state: row.state,
      reason: row.reason,
      openedAt: row.openedAt,
      openedBy: row.openedByCompanyId === order.buyerCompanyId ? order.buyerName : order.fabricatorName,
      amountClaimed: row.amountClaimed,
      releaseAmount: row.releaseAmount,
      refundAmount: row.refundAmount,
    })),
    proposals: proposals.map((row) => ({
      id: row.id,
      own: row.companyId === (side === 'buyer' ? order.buyerCompanyId : order.fabricatorCompanyId),
      by: row.companyId === order.buyerCompanyId ? order.buyerName : order.fabricatorName,
      proposedBy: names.get(row.proposedBy) ?? '',
      proposedAt: row.proposedAt,
      parts: row.parts,
      workInHand: row.workInHand,
      reason: row.reason,
      state: row.state,
    })),
    messages: await listMessages(reader, person, order.id),
    history: events.map((row) => ({
      id: row.id,
      at: row.at,
      text: row.text,
      who: row.userId === null ? null : (names.get(row.userId) ?? null),
      company:
        row.companyId === null
          ? null
          : row.companyId === order.buyerCompanyId
            ? order.buyerName
            : order.fabricatorName,
    })),
  };
}
export type OrderView = Awaited<ReturnType<typeof viewOrder>>;
