import { sql } from 'drizzle-orm';
import { check, index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { disputeReasons, disputeStates } from '../../../domain/dispute-states.ts';
import { user } from './auth.ts';
import { id, instant, version } from './columns.ts';
import { company } from './companies.ts';
import { coilOrder, milestone } from './orders.ts';

const companyRef = (name: string) => text(name).references(() => company.id, { onDelete: 'restrict' });
const userRef = (name: string) => text(name).references(() => user.id, { onDelete: 'restrict' });

export const dispute = sqliteTable(
  'dispute',
  {
    id: id(),
    orderId: text('order_id')
      .notNull()
      .references(() => coilOrder.id, { onDelete: 'restrict' }),
    milestoneId: text('milestone_id')
      .notNull()
      .references(() => milestone.id, { onDelete: 'restrict' }),
    state: text('state', { enum: disputeStates }).notNull(),
    reason: text('reason', { enum: disputeReasons }).notNull(),
    /** The acceptance line or piece complained of, as the person named it. */
    complaintAbout: text('complaint_about').notNull(),
    pieceId: text('piece_id'),
    /** What the opener says should not be released (buyer) or should be (fabricator), minor units. */
    amountClaimed: integer('amount_claimed').notNull(),
    text: text('text').notNull(),
    openedBy: userRef('opened_by').notNull(),
    openedByCompanyId: companyRef('opened_by_company_id').notNull(),
    openedAt: instant('opened_at').notNull(),
    answerDueAt: instant('answer_due_at').notNull(),
    decisionDueAt: instant('decision_due_at').notNull(),
    appealUntil: instant('appeal_until'),
    closedAt: instant('closed_at'),
    /** The split that stands, once there is one. */
    releaseAmount: integer('release_amount'),
    refundAmount: integer('refund_amount'),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('dispute_open_per_milestone')
      .on(table.milestoneId)
      .where(sql`state in ('open', 'answered', 'decided', 'appealed')`),
    index('dispute_state').on(table.state, table.openedAt),
    index('dispute_order').on(table.orderId),
  ],
);

export const disputeStatement = sqliteTable(
  'dispute_statement',
  {
    id: id(),
    disputeId: text('dispute_id')
      .notNull()
      .references(() => dispute.id, { onDelete: 'restrict' }),
    kind: text('kind', { enum: ['opening', 'answer', 'statement', 'appeal'] }).notNull(),
    authorUserId: userRef('author_user_id').notNull(),
    /** Null for the platform. */
    authorCompanyId: companyRef('author_company_id'),
    text: text('text').notNull(),
    at: instant('at').notNull(),
    commandId: text('command_id').notNull().unique(),
  },
  (table) => [index('dispute_statement_dispute').on(table.disputeId, table.at)],
);

export const disputeFile = sqliteTable(
  'dispute_file',
  {
    statementId: text('statement_id')
      .notNull()
      .references(() => disputeStatement.id, { onDelete: 'restrict' }),
    fileId: text('file_id').notNull(),
  },
  (table) => [uniqueIndex('dispute_file_once').on(table.statementId, table.fileId)],
);

/** An offer to settle; the newest open one of either side can be accepted by the other. */
export const settlementOffer = sqliteTable(
  'settlement_offer',
  {
    id: id(),
    disputeId: text('dispute_id')
      .notNull()
      .references(() => dispute.id, { onDelete: 'restrict' }),
    companyId: companyRef('company_id').notNull(),
    offeredBy: userRef('offered_by').notNull(),
    offeredAt: instant('offered_at').notNull(),
    releaseAmount: integer('release_amount').notNull(),
    refundAmount: integer('refund_amount').notNull(),
    note: text('note').notNull(),
    state: text('state', { enum: ['open', 'accepted', 'replaced', 'declined', 'overtaken'] }).notNull(),
    commandId: text('command_id').notNull().unique(),
    version: version(),
  },
  (table) => [
    uniqueIndex('settlement_offer_open')
      .on(table.disputeId, table.companyId)
      .where(sql`state = 'open'`),
    check('settlement_offer_parts', sql`${table.releaseAmount} >= 0 and ${table.refundAmount} >= 0`),
  ],
);

export const disputeDecision = sqliteTable(
  'dispute_decision',
  {
    id: id(),
    disputeId: text('dispute_id')
      .notNull()
      .references(() => dispute.id, { onDelete: 'restrict' }),
    /** 1 = first decision, 2 = on appeal, by another admin. */
    instance: integer('instance').notNull(),
    releaseAmount: integer('release_amount').notNull(),
    refundAmount: integer('refund_amount').notNull(),
    goods: text('goods').notNull(),
    otherMilestones: text('other_milestones').notNull(),
    freightPaidBy: text('freight_paid_by', { enum: ['buyer', 'fabricator', 'none'] }).notNull(),
    reason: text('reason').notNull(),
    decidedBy: userRef('decided_by').notNull(),
    at: instant('at').notNull(),
  },
  (table) => [
    uniqueIndex('dispute_decision_instance').on(table.disputeId, table.instance),
    check('dispute_decision_parts', sql`${table.releaseAmount} >= 0 and ${table.refundAmount} >= 0`),
  ],
);
