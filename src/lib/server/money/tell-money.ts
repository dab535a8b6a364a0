import { milestoneKindText } from '../../domain/milestone-states.ts';
import { formatMoney } from '../../domain/money.ts';
import type { By } from '../audit/index.ts';
import type { Tx } from '../db/index.ts';
import { tell, type MilestoneRow, type OrderRow } from '../orders/index.ts';

const named = (row: MilestoneRow) => milestoneKindText[row.kind].toLowerCase();
const anchor = (row: MilestoneRow) => `milestone-${row.id}`;

function amount(order: OrderRow, minor: number): string {
  return formatMoney({ amount: minor, currency: order.currency });
}

export async function tellFunded(tx: Tx, order: OrderRow, row: MilestoneRow): Promise<void> {
  await tell(tx, order, {
    kind: 'milestone-funded',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `${amount(order, row.amount)} for the ${named(row)} milestone has arrived and is held by the platform until release.`,
    subject: `${named(row)} funded`,
    action: 'Open the milestone',
    anchor: anchor(row),
    buyer: ['purchaser'],
    fabricator: ['estimator', 'builder'],
  });
}

export async function tellPaymentFailed(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  how: string,
  key: string,
): Promise<void> {
  await tell(tx, order, {
    kind: 'payment-failed',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `The payment of the ${named(row)} milestone ${how}.`,
    subject: `payment of ${named(row)} failed`,
    paragraphs: [
      'Nothing was taken. It can be tried again at any time, with the same or another way to pay.',
    ],
    action: 'Fund the milestone',
    anchor: anchor(row),
    buyer: ['purchaser'],
    fabricator: null,
    dedupeKey: key,
  });
}

export async function tellReleased(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  paid: { net: number; fee: number },
): Promise<void> {
  await tell(tx, order, {
    kind: 'released',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `${amount(order, paid.net + paid.fee)} of the ${named(row)} milestone was released and paid out.`,
    subject: `${named(row)} released and paid out`,
    facts: [
      ['Released', amount(order, paid.net + paid.fee)],
      ['Platform fee', amount(order, paid.fee)],
      ['Paid out', amount(order, paid.net)],
    ],
    action: 'Open the statement',
    anchor: 'money',
    buyer: ['purchaser'],
    fabricator: ['estimator'],
  });
}

export async function tellRefunded(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  refund: number,
): Promise<void> {
  await tell(tx, order, {
    kind: 'refunded',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `${amount(order, refund)} of the ${named(row)} milestone was refunded to the buyer.`,
    subject: `${named(row)} refunded`,
    action: 'Open the statement',
    anchor: 'money',
    buyer: ['purchaser'],
    fabricator: ['estimator'],
  });
}

export async function tellSplit(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  paid: { net: number; fee: number },
  refund: number,
): Promise<void> {
  await tell(tx, order, {
    kind: 'split',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `The money held for the ${named(row)} milestone was split: ${amount(order, paid.net + paid.fee)} released, ${amount(order, refund)} refunded.`,
    subject: `${named(row)} split and paid`,
    facts: [
      ['Released', amount(order, paid.net + paid.fee)],
      ['Platform fee', amount(order, paid.fee)],
      ['Paid out', amount(order, paid.net)],
      ['Refunded', amount(order, refund)],
    ],
    action: 'Open the statement',
    anchor: 'money',
    buyer: ['purchaser'],
    fabricator: ['estimator'],
  });
}

/** A restricted payee: the money stays held, and both are told. */
export async function tellPayeeRestricted(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  key: string,
): Promise<void> {
  await tell(tx, order, {
    kind: 'payout-account-attention',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `The ${named(row)} milestone cannot be paid out yet: the payout account of ${order.fabricatorName} cannot receive money at present. The money stays held by the platform.`,
    subject: 'payout account needs attention',
    onlyFabricator: ['Please complete what the payment service asks for; the payout follows by itself then.'],
    action: 'Open the order',
    anchor: anchor(row),
    buyer: ['purchaser'],
    fabricator: [],
    dedupeKey: `payee-restricted/${key}`,
  });
}

/** A refund came back: the money is with the platform again, and both are told. */
export async function tellRefundFailed(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  key: string,
): Promise<void> {
  await tell(tx, order, {
    kind: 'refund-failed',
    by: 'system',
    side: null,
    milestoneId: row.id,
    text: `The refund of the ${named(row)} milestone came back from the bank. The money is held by the platform, which looks for another way with the buyer.`,
    subject: 'a refund came back',
    action: 'Open the order',
    anchor: anchor(row),
    buyer: ['purchaser'],
    fabricator: ['estimator'],
    dedupeKey: `refund-failed/${key}`,
  });
}

export async function tellChargeBack(
  tx: Tx,
  order: OrderRow,
  row: MilestoneRow,
  what: 'opened' | 'won' | 'lost',
  minor: number,
): Promise<void> {
  const text = {
    opened: `The card holder’s bank has taken back ${amount(order, minor)} of the ${named(row)} milestone. The platform answers the bank.`,
    won: `The bank has returned ${amount(order, minor)} of the ${named(row)} milestone.`,
    lost: `The bank has decided to keep ${amount(order, minor)} of the ${named(row)} milestone with the card holder.`,
  }[what];
  await tell(tx, order, {
    kind: 'charge-back',
    by: 'system' as By,
    side: null,
    milestoneId: row.id,
    text,
    subject: `payment of ${named(row)} taken back: ${what}`,
    action: 'Open the order',
    anchor: anchor(row),
    buyer: ['purchaser'],
    fabricator: ['estimator'],
  });
}
