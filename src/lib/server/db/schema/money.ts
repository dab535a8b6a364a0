import { sql } from 'drizzle-orm';
import { check, index, integer, sqliteTable, text, uniqueIndex } from 'drizzle-orm/sqlite-core';
import { ledgerAccountKinds, ledgerTxKinds } from '../../../domain/ledger.ts';
import { user } from './auth.ts';
import { flag, id, instant, json, version } from './columns.ts';
import { company } from './companies.ts';
import { coilOrder, milestone } from './orders.ts';

const currency = () => text('currency', { enum: ['EUR', 'USD', 'GBP'] }).notNull();
const orderRef = () => text('order_id').references(() => coilOrder.id, { onDelete: 'restrict' });
const milestoneRef = () => text('milestone_id').references(() => milestone.id, { onDelete: 'restrict' });

export const ledgerAccount = sqliteTable('ledger_account', {
  id: id(),
  /** e.g. `held:<milestone>`, `clearing:EUR`. */
  key: text('key').notNull().unique(),
  kind: text('kind', { enum: ledgerAccountKinds }).notNull(),
  currency: currency(),
  orderId: orderRef(),
  milestoneId: milestoneRef(),
  companyId: text('company_id').references(() => company.id, { onDelete: 'restrict' }),
});

/** One booking; append-only. The key of the operation makes a second booking of it impossible. */
export const ledgerTx = sqliteTable(
  'ledger_tx',
  {
    id: id(),
    opKey: text('op_key').notNull().unique(),
    kind: text('kind', { enum: ledgerTxKinds }).notNull(),
    orderId: orderRef().notNull(),
    milestoneId: milestoneRef(),
    currency: currency(),
    reason: text('reason').notNull(),
    /** Id of the object at the payment service. */
    objectId: text('object_id'),
    at: instant('at').notNull(),
  },
  (table) => [index('ledger_tx_order').on(table.orderId, table.at)],
);

export const ledgerEntry = sqliteTable(
  'ledger_entry',
  {
    id: id(),
    txId: text('tx_id')
      .notNull()
      .references(() => ledgerTx.id, { onDelete: 'restrict' }),
    accountId: text('account_id')
      .notNull()
      .references(() => ledgerAccount.id, { onDelete: 'restrict' }),
    milestoneId: milestoneRef(),
    debit: integer('debit').notNull(),
    credit: integer('credit').notNull(),
    /** Balance transaction at the payment service, on lines of the clearing account. */
    balanceTransactionId: text('balance_transaction_id'),
  },
  (table) => [
    index('ledger_entry_tx').on(table.txId),
    index('ledger_entry_account').on(table.accountId),
    index('ledger_entry_milestone').on(table.milestoneId),
    index('ledger_entry_balance_transaction').on(table.balanceTransactionId),
    check(
      'ledger_entry_one_side',
      sql`${table.debit} >= 0 and ${table.credit} >= 0 and (${table.debit} = 0) <> (${table.credit} = 0)`,
    ),
  ],
);

export const operationKinds = ['checkout', 'transfer', 'refund', 'expire-session', 'payout-account'] as const;
export const operationStates = ['planned', 'sent', 'known', 'unknown', 'failed'] as const;

/**
 * One call to the payment service: planned and committed before it is made. `sent` is written before
 * the request leaves, so a row found in `sent` or `unknown` may have had its effect.
 */
export const paymentOperation = sqliteTable(
  'payment_operation',
  {
    id: id(),
    /** Idempotency key at the service and unique here. */
    key: text('key').notNull().unique(),
    /** Names what is to happen, over all tries with a new key: `release:<milestone>`. */
    purpose: text('purpose').notNull(),
    generation: integer('generation').notNull().default(1),
    kind: text('kind', { enum: operationKinds }).notNull(),
    orderId: orderRef(),
    milestoneId: milestoneRef(),
    companyId: text('company_id').references(() => company.id, { onDelete: 'restrict' }),
    request: json<Record<string, unknown>>('request').notNull(),
    requestHash: text('request_hash').notNull(),
    state: text('state', { enum: operationStates }).notNull(),
    attempts: integer('attempts').notNull().default(0),
    objectId: text('object_id'),
    /** What the service answered, as far as the next steps need it. */
    result: json<Record<string, unknown>>('result'),
    errorCode: text('error_code'),
    lastError: text('last_error'),
    plannedAt: instant('planned_at').notNull(),
    sentAt: instant('sent_at'),
    knownAt: instant('known_at'),
    /** Real time of the next try by the recovery run. */
    nextTryAt: instant('next_try_at').notNull(),
    version: version(),
  },
  (table) => [
    index('payment_operation_due').on(table.state, table.nextTryAt),
    uniqueIndex('payment_operation_generation').on(table.purpose, table.generation),
    index('payment_operation_milestone').on(table.milestoneId),
    uniqueIndex('payment_operation_live')
      .on(table.purpose)
      .where(sql`state in ('planned', 'sent', 'unknown')`),
  ],
);

/** What the payment service told us; stored by its id before anything is done. */
export const paymentEvent = sqliteTable(
  'payment_event',
  {
    /** The service's event id. */
    id: id(),
    endpoint: text('endpoint', { enum: ['payments', 'accounts'] }).notNull(),
    type: text('type').notNull(),
    objectId: text('object_id').notNull(),
    /** The metadata of the object; the object itself is fetched when it is processed. */
    reference: json<Record<string, string>>('reference').notNull(),
    created: instant('created').notNull(),
    receivedAt: instant('received_at').notNull(),
    source: text('source', { enum: ['webhook', 'backfill'] }).notNull(),
    state: text('state', { enum: ['received', 'processed', 'ignored', 'quarantined'] }).notNull(),
    note: text('note').notNull().default(''),
    processedAt: instant('processed_at'),
  },
  (table) => [index('payment_event_state').on(table.state, table.receivedAt)],
);

export const payoutAccount = sqliteTable('payout_account', {
  id: id(),
  companyId: text('company_id')
    .notNull()
    .unique()
    .references(() => company.id, { onDelete: 'restrict' }),
  /** Null until the payment service answered. */
  accountId: text('account_id').unique(),
  state: text('state', { enum: ['none', 'onboarding', 'ready', 'restricted'] }).notNull(),
  /** What the service still asks for, as it names it. */
  requirements: json<string[]>('requirements').notNull(),
  country: text('country').notNull(),
  createdBy: text('created_by').references(() => user.id, { onDelete: 'restrict' }),
  createdAt: instant('created_at').notNull(),
  checkedAt: instant('checked_at'),
  version: version(),
});

/** A payment page opened for a milestone; at most one is open. */
export const paymentSession = sqliteTable(
  'payment_session',
  {
    id: id(),
    orderId: orderRef().notNull(),
    milestoneId: milestoneRef().notNull(),
    attempt: integer('attempt').notNull(),
    operationId: text('operation_id').references(() => paymentOperation.id, { onDelete: 'restrict' }),
    sessionId: text('session_id').unique(),
    url: text('url'),
    amount: integer('amount').notNull(),
    currency: currency(),
    state: text('state', {
      enum: ['opening', 'open', 'processing', 'paid', 'lapsed', 'surplus', 'quarantined'],
    }).notNull(),
    paymentIntentId: text('payment_intent_id'),
    chargeId: text('charge_id'),
    openedBy: text('opened_by').references(() => user.id, { onDelete: 'restrict' }),
    openedAt: instant('opened_at').notNull(),
    /** Real time at the service. */
    expiresAt: instant('expires_at'),
    paidAt: instant('paid_at'),
    version: version(),
  },
  (table) => [
    uniqueIndex('payment_session_open')
      .on(table.milestoneId)
      .where(sql`state in ('opening', 'open', 'processing')`),
    uniqueIndex('payment_session_paid')
      .on(table.milestoneId)
      .where(sql`state = 'paid'`),
    uniqueIndex('payment_session_attempt').on(table.milestoneId, table.attempt),
    index('payment_session_intent').on(table.paymentIntentId),
    index('payment_session_charge').on(table.chargeId),
  ],
);

/** A charge-back at the card holder's bank. */
export const chargeBack = sqliteTable('charge_back', {
  /** The service's id of it. */
  id: id(),
  orderId: orderRef().notNull(),
  milestoneId: milestoneRef().notNull(),
  chargeId: text('charge_id').notNull(),
  amount: integer('amount').notNull(),
  currency: currency(),
  state: text('state', { enum: ['open', 'won', 'lost'] }).notNull(),
  /** Where the money was when it came: decides what winning gives back. */
  moneyBefore: text('money_before', { enum: ['held', 'released', 'split', 'refunded'] }).notNull(),
  openedAt: instant('opened_at').notNull(),
  closedAt: instant('closed_at'),
});

/** Something about money that a person of the platform must look at. */
export const moneyAlarm = sqliteTable(
  'money_alarm',
  {
    id: id(),
    /** The same thing raises one alarm. */
    key: text('key').notNull().unique(),
    kind: text('kind').notNull(),
    orderId: text('order_id'),
    milestoneId: text('milestone_id'),
    objectId: text('object_id'),
    detail: text('detail').notNull(),
    at: instant('at').notNull(),
    resolvedAt: instant('resolved_at'),
    resolvedBy: text('resolved_by').references(() => user.id, { onDelete: 'restrict' }),
    resolution: text('resolution').notNull().default(''),
  },
  (table) => [index('money_alarm_open').on(table.resolvedAt, table.at)],
);

export const reconciliationRun = sqliteTable('reconciliation_run', {
  id: id(),
  at: instant('at').notNull(),
  balanced: flag('balanced').notNull(),
  compared: integer('compared').notNull(),
  differences: json<{ kind: string; id: string; detail: string }[]>('differences').notNull(),
});
