import { asc, desc, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates } from '../../domain/dispute-states.ts';
import { AppError } from '../../domain/errors.ts';
import type { Permission } from '../../domain/permissions.ts';
import { requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import {
  dispute,
  disputeDecision,
  disputeFile,
  disputeStatement,
  settlementOffer,
} from '../db/schema/disputes.ts';
import {
  companyOf,
  parties,
  sideOf,
  unsafeMilestone,
  unsafeOrder,
  type MilestoneRow,
  type OrderRow,
  type Side,
} from '../orders/index.ts';

export type DisputeRow = typeof dispute.$inferSelect;

export interface DisputeCase {
  dispute: DisputeRow;
  order: OrderRow;
  milestone: MilestoneRow;
  opener: Side;
}

/** A dispute with its order and milestone. Not scoped: the caller authorises. */
export async function unsafeDispute(reader: Reader, disputeId: string): Promise<DisputeCase> {
  const [row] = await reader.select().from(dispute).where(eq(dispute.id, disputeId));
  if (!row) throw new AppError('not-found');
  const order = await unsafeOrder(reader, row.orderId);
  return {
    dispute: row,
    order,
    milestone: await unsafeMilestone(reader, row.milestoneId),
    opener: row.openedByCompanyId === order.buyerCompanyId ? 'buyer' : 'fabricator',
  };
}

/** The case for a party who may act in it, with the side the person stands on. */
export async function caseFor(
  reader: Reader,
  actor: Actor | null,
  permission: Permission,
  disputeId: string,
): Promise<DisputeCase & { side: Side; companyId: string; by: Actor }> {
  const found = await unsafeDispute(reader, disputeId);
  requireAccess(actor, permission, parties(found.order));
  const side = sideOf(actor, permission, found.order);
  if (!side) throw new AppError('not-allowed');
  return { ...found, side, companyId: companyOf(found.order, side), by: actor };
}

export async function statementsOf(reader: Reader, disputeId: string) {
  const rows = await reader
    .select()
    .from(disputeStatement)
    .where(eq(disputeStatement.disputeId, disputeId))
    .orderBy(asc(disputeStatement.at), asc(disputeStatement.id));
  const ids = rows.map((row) => row.id);
  const files =
    ids.length === 0
      ? []
      : await reader.select().from(disputeFile).where(inArray(disputeFile.statementId, ids));
  return rows.map((row) => ({
    ...row,
    fileIds: files.filter((file) => file.statementId === row.id).map((file) => file.fileId),
  }));
}

export async function offersOf(reader: Reader, disputeId: string) {
  return reader
    .select()
    .from(settlementOffer)
    .where(eq(settlementOffer.disputeId, disputeId))
    .orderBy(asc(settlementOffer.offeredAt), asc(settlementOffer.id));
}

export async function decisionsOf(reader: Reader, disputeId: string) {
  return reader
    .select()
    .from(disputeDecision)
    .where(eq(disputeDecision.disputeId, disputeId))
    .orderBy(asc(disputeDecision.instance));
}

/** All disputes of an order, the newest first. Not scoped: the caller authorises the order. */
export async function unsafeDisputesOfOrder(reader: Reader, orderId: string): Promise<DisputeRow[]> {
  return reader.select().from(dispute).where(eq(dispute.orderId, orderId)).orderBy(desc(dispute.openedAt));
}

/** For the admin: what waits for a decision first, then the rest. */
export async function listDisputes(reader: Reader, actor: Actor | null, which: 'open' | 'closed') {
  requireAccess(actor, 'admin.decide-dispute');
  const rows = await reader.select().from(dispute).orderBy(asc(dispute.decisionDueAt)).limit(500);
  const open = (row: DisputeRow) => openDisputeStates.includes(row.state);
  const chosen = rows.filter((row) => open(row) === (which === 'open'));
  return Promise.all(
    chosen.map(async (row) => {
      const order = await unsafeOrder(reader, row.orderId);
      return {
        ...row,
        orderNumber: order.number,
        currency: order.currency,
        title: order.title,
        buyerName: order.buyerName,
        fabricatorName: order.fabricatorName,
      };
    }),
  );
}
