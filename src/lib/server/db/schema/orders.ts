import { sql } from 'drizzle-orm';
import { check, index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { drawingStates } from '../../../domain/drawing-states.ts';
import {
  attentionReasons,
  milestoneKinds,
  moneyStates,
  workStates,
} from '../../../domain/milestone-states.ts';
import { orderStates } from '../../../domain/order-states.ts';
import { pieceStates, recordStates, verdicts } from '../../../domain/piece-states.ts';
import type { AsBuiltBody, AsBuiltOutcome, LineVerdict } from '../../../domain/as-built.ts';
import type { OrderTerms } from '../../../domain/order-terms.ts';
import { user } from './auth.ts';
import { id, instant, json, version } from './columns.ts';
import { company } from './companies.ts';

const companyRef = (name: string) => text(name).references(() => company.id, { onDelete: 'restrict' });
const userRef = (name: string) => text(name).references(() => user.id, { onDelete: 'restrict' });

export const coilOrder = sqliteTable(
  'coil_order',
  {
    id: id(),
    /** Counted per buyer company: O-1001. */
    number: integer('number').notNull(),
    requestId: text('request_id').notNull(),
    bidId: text('bid_id').notNull().unique(),
    specificationId: text('specification_id').notNull(),
    buyerCompanyId: companyRef('buyer_company_id').notNull(),
    fabricatorCompanyId: companyRef('fabricator_company_id').notNull(),
    title: text('title').notNull(),
    quantity: integer('quantity').notNull(),
    state: text('state', { enum: orderStates }).notNull(),
    currency: text('currency', { enum: ['EUR', 'USD', 'GBP'] }).notNull(),
    /** Minor units; net is without tax and freight, total is all that the buyer pays. */
    netAmount: integer('net_amount').notNull(),
    taxAmount: integer('tax_amount').notNull(),
    freightAmount: integer('freight_amount').notNull(),
    totalAmount: integer('total_amount').notNull(),
    feeBasisPoints: integer('fee_basis_points').notNull(),
    inspectionDays: integer('inspection_days').notNull(),
    buyerZone: text('buyer_zone').notNull(),
    leadTimeWorkingDays: integer('lead_time_working_days').notNull(),
    /** YYYY-MM-DD; set when drawing is approved and the build is funded. */
    dueDate: text('due_date'),
    needBy: text('need_by'),
    terms: json<OrderTerms>('terms').notNull(),
    awardedAt: instant('awarded_at').notNull(),
    awardedBy: userRef('awarded_by'),
    acknowledgedAt: instant('acknowledged_at'),
    acknowledgedBy: userRef('acknowledged_by'),
    /** Since when the clocks stand still because of a dispute. */
    clockStoppedAt: instant('clock_stopped_at'),
    /** When they last began to run again: waits that had begun before count from here. */
    clockResumedAt: instant('clock_resumed_at'),
    /** Business time at which the deadlines have to be looked at again; 0 after every change. */
    nextCheckAt: instant('next_check_at').notNull().default(0),
    closedAt: instant('closed_at'),
    endReason: text('end_reason').notNull().default(''),
    version: version(),
  },
  (table) => [
    uniqueIndex('coil_order_live_per_request')
      .on(table.requestId)
      .where(sql`state in ('to-acknowledge', 'running', 'suspended')`),
    uniqueIndex('coil_order_number').on(table.buyerCompanyId, table.number),
    index('coil_order_check').on(table.nextCheckAt),
    index('coil_order_buyer').on(table.buyerCompanyId, table.state, table.awardedAt),
    index('coil_order_fabricator').on(table.fabricatorCompanyId, table.state, table.awardedAt),
  ],
);

export const orderSpecification = sqliteTable(
  'order_specification',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    number: integer('number').notNull(),
    /** The exact bytes that the hash is of. */
    body: text('body').notNull(),
    hash: text('hash').notNull(),
    reason: text('reason').notNull(),
    createdAt: instant('created_at').notNull(),
  },
  (table) => [uniqueIndex('order_specification_number').on(table.orderId, table.number)],
);

export const milestone = sqliteTable(
  'milestone',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    position: integer('position').notNull(),
    kind: text('kind', { enum: milestoneKinds }).notNull(),
    /** What the buyer pays for it, minor units. */
    amount: integer('amount').notNull(),
    /** The part of it that the platform fee is taken of (net, without tax and freight). */
    feeBase: integer('fee_base').notNull(),
    work: text('work', { enum: workStates }).notNull(),
    money: text('money', { enum: moneyStates }).notNull(),
    attention: text('attention', { enum: attentionReasons }),
    dueDate: text('due_date'),
    /** Since when it waits for its funding. */
    fundingAskedAt: instant('funding_asked_at'),
    heldAt: instant('held_at'),
    openedAt: instant('opened_at'),
    submittedAt: instant('submitted_at'),
    acceptedAt: instant('accepted_at'),
    windowEndsAt: instant('window_ends_at'),
    returnedCount: integer('returned_count').notNull().default(0),
    /** What is to go out, set when release, refund or split begins. */
    releaseAmount: integer('release_amount').notNull().default(0),
    refundAmount: integer('refund_amount').notNull().default(0),
    closedAt: instant('closed_at'),
    version: version(),
  },
  (table) => [
    uniqueIndex('milestone_position').on(table.orderId, table.position),
    index('milestone_window').on(table.money, table.windowEndsAt),
    check(
      'milestone_amounts',
      sql`${table.amount} > 0 and ${table.feeBase} >= 0 and ${table.feeBase} <= ${table.amount}`,
    ),
    check(
      'milestone_parts',
      sql`${table.releaseAmount} >= 0 and ${table.refundAmount} >= 0 and ${table.releaseAmount} + ${table.refundAmount} <= ${table.amount}`,
    ),
  ],
);

/** A submission sent back, with its reasons. */
export const milestoneReturn = sqliteTable(
  'milestone_return',
  {
    id: id(),
    milestoneId: text('milestone_id')
      .notNull()
      .references(() => milestone.id, { onDelete: 'restrict' }),
    number: integer('number').notNull(),
    reasons: text('reasons').notNull(),
    returnedBy: userRef('returned_by').notNull(),
    at: instant('at').notNull(),
  },
  (table) => [uniqueIndex('milestone_return_number').on(table.milestoneId, table.number)],
);

export const piece = sqliteTable(
  'piece',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    kind: text('kind', { enum: ['coil', 'fixture'] }).notNull(),
    position: integer('position').notNull(),
    serial: text('serial').notNull(),
    state: text('state', { enum: pieceStates }).notNull(),
    replacesPieceId: text('replaces_piece_id'),
    createdAt: instant('created_at').notNull(),
    version: version(),
  },
  (table) => [
    uniqueIndex('piece_serial').on(table.orderId, table.serial),
    index('piece_by_serial').on(table.serial),
  ],
);

export const drawingRevision = sqliteTable(
  'drawing_revision',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    letter: text('letter').notNull(),
    fileId: text('file_id').notNull(),
    note: text('note').notNull().default(''),
    state: text('state', { enum: drawingStates }).notNull(),
    sha256: text('sha256').notNull(),
    submittedBy: userRef('submitted_by').notNull(),
    submittedAt: instant('submitted_at').notNull(),
    judgedBy: userRef('judged_by'),
    judgedAt: instant('judged_at'),
    reasons: text('reasons').notNull().default(''),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [uniqueIndex('drawing_revision_letter').on(table.orderId, table.letter)],
);

export const asBuiltRecord = sqliteTable(
  'as_built_record',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    pieceId: text('piece_id')
      .notNull()
      .references(() => piece.id, { onDelete: 'restrict' }),
    attempt: integer('attempt').notNull(),
    body: json<AsBuiltBody>('body').notNull(),
    verdicts: json<LineVerdict[]>('verdicts').notNull(),
    verdict: text('verdict', { enum: verdicts }).notNull(),
    state: text('state', { enum: recordStates }).notNull(),
    /** The machine setting that now tunes the coil; computed by a job, null until then. */
    outcome: json<AsBuiltOutcome>('outcome'),
    /** The order specification it was judged against. */
    specificationHash: text('specification_hash').notNull(),
    enteredBy: userRef('entered_by').notNull(),
    enteredAt: instant('entered_at').notNull(),
    judgedBy: userRef('judged_by'),
    judgedAt: instant('judged_at'),
    reasons: text('reasons').notNull().default(''),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('as_built_record_attempt').on(table.pieceId, table.attempt),
    index('as_built_record_order').on(table.orderId),
  ],
);

export const asBuiltFile = sqliteTable(
  'as_built_file',
  {
    recordId: text('record_id')
      .notNull()
      .references(() => asBuiltRecord.id, { onDelete: 'restrict' }),
    fileId: text('file_id').notNull(),
    kind: text('kind', { enum: ['photo', 'certificate'] }).notNull(),
  },
  (table) => [uniqueIndex('as_built_file_once').on(table.recordId, table.fileId)],
);

export const shipment = sqliteTable(
  'shipment',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    carrier: text('carrier').notNull(),
    trackingNumber: text('tracking_number').notNull(),
    shippedOn: text('shipped_on').notNull(),
    note: text('note').notNull().default(''),
    paperFileId: text('paper_file_id'),
    shippedBy: userRef('shipped_by').notNull(),
    createdAt: instant('created_at').notNull(),
    /** Proof of delivery entered by the fabricator; receipt confirmed by the buyer. */
    deliveredOn: text('delivered_on'),
    deliveryProofAt: instant('delivery_proof_at'),
    proofFileId: text('proof_file_id'),
    receivedAt: instant('received_at'),
    receivedBy: userRef('received_by'),
    receivedNote: text('received_note').notNull().default(''),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [index('shipment_order').on(table.orderId)],
);

export const orderMessage = sqliteTable(
  'order_message',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    authorUserId: userRef('author_user_id').notNull(),
    authorCompanyId: companyRef('author_company_id').notNull(),
    text: text('text').notNull(),
    at: instant('at').notNull(),
    commandId: text('command_id').unique(),
  },
  (table) => [index('order_message_order').on(table.orderId, table.at)],
);

export const orderMessageFile = sqliteTable(
  'order_message_file',
  {
    messageId: text('message_id')
      .notNull()
      .references(() => orderMessage.id, { onDelete: 'restrict' }),
    fileId: text('file_id').notNull(),
  },
  (table) => [uniqueIndex('order_message_file_once').on(table.messageId, table.fileId)],
);

/** What happened, as both companies read it; append-only. */
export const orderEvent = sqliteTable(
  'order_event',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    milestoneId: text('milestone_id'),
    kind: text('kind').notNull(),
    text: text('text').notNull(),
    /** Whose act it was; null for what happened by itself. */
    userId: userRef('user_id'),
    companyId: companyRef('company_id'),
    at: instant('at').notNull(),
  },
  (table) => [index('order_event_order').on(table.orderId, table.at)],
);

/** A proposal to end the order by agreement; a counter-proposal is a new row. */
export const endProposal = sqliteTable(
  'end_proposal',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    companyId: companyRef('company_id').notNull(),
    proposedBy: userRef('proposed_by').notNull(),
    proposedAt: instant('proposed_at').notNull(),
    parts: json<{ milestoneId: string; release: number; refund: number }[]>('parts').notNull(),
    workInHand: text('work_in_hand').notNull(),
    reason: text('reason').notNull(),
    state: text('state', {
      enum: ['open', 'accepted', 'declined', 'countered', 'withdrawn', 'overtaken'],
    }).notNull(),
    decidedBy: userRef('decided_by'),
    decidedAt: instant('decided_at'),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('end_proposal_open')
      .on(table.orderId)
      .where(sql`state = 'open'`),
  ],
);

/** A reminder or consequence that was given once; the key names the wait and the step. */
export const deadlineNotice = sqliteTable('deadline_notice', {
  key: text('key').primaryKey(),
  orderId: text('order_id').notNull(),
  at: instant('at').notNull(),
});
