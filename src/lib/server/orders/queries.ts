import { and, asc, desc, eq, inArray } from 'drizzle-orm';
import { alias } from 'drizzle-orm/sqlite-core';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates } from '../../domain/dispute-states.ts';
import { AppError } from '../../domain/errors.ts';
import type { Permission } from '../../domain/permissions.ts';
import { can, requireAccess } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { dispute } from '../db/schema/disputes.ts';
import { coilOrder, milestone, orderSpecification, piece } from '../db/schema/orders.ts';

export type OrderRow = typeof coilOrder.$inferSelect & { buyerName: string; fabricatorName: string };
export type MilestoneRow = typeof milestone.$inferSelect;
export type PieceRow = typeof piece.$inferSelect;
export type Side = 'buyer' | 'fabricator';

const buyer = alias(company, 'buyer');
const fabricator = alias(company, 'fabricator');

/** An order with the names of its parties. Not scoped: the caller authorises. */
export async function unsafeOrder(reader: Reader, orderId: string): Promise<OrderRow> {
  const [row] = await reader
    .select({ order: coilOrder, buyerName: buyer.name, fabricatorName: fabricator.name })
    .from(coilOrder)
    .innerJoin(buyer, eq(buyer.id, coilOrder.buyerCompanyId))
    .innerJoin(fabricator, eq(fabricator.id, coilOrder.fabricatorCompanyId))
    .where(eq(coilOrder.id, orderId));
  if (!row) throw new AppError('not-found');
  return { ...row.order, buyerName: row.buyerName, fabricatorName: row.fabricatorName };
}

/** The order for one who may do this to it; everybody else is told "not found" or "not allowed". */
export async function orderFor(
  reader: Reader,
  actor: Actor | null,
  permission: Permission,
  orderId: string,
): Promise<OrderRow> {
  const order = await unsafeOrder(reader, orderId);
  requireAccess(actor, permission, parties(order));
  return order;
}

export function parties(order: { buyerCompanyId: string; fabricatorCompanyId: string }) {
  return { buyerCompanyId: order.buyerCompanyId, fabricatorCompanyId: order.fabricatorCompanyId };
}

/** On which side of the order the actor may do this; null when on neither. */
export function sideOf(
  actor: Actor,
  permission: Permission,
  order: { buyerCompanyId: string; fabricatorCompanyId: string },
): Side | null {
  if (can(actor, permission, { buyerCompanyId: order.buyerCompanyId })) return 'buyer';
  if (can(actor, permission, { fabricatorCompanyId: order.fabricatorCompanyId })) return 'fabricator';
  return null;
}

export function companyOf(
  order: { buyerCompanyId: string; fabricatorCompanyId: string },
  side: Side,
): string {
  return side === 'buyer' ? order.buyerCompanyId : order.fabricatorCompanyId;
}

export async function milestonesOf(reader: Reader, orderId: string): Promise<MilestoneRow[]> {
  return reader
    .select()
    .from(milestone)
    .where(eq(milestone.orderId, orderId))
    .orderBy(asc(milestone.position));
}

export async function unsafeMilestone(reader: Reader, milestoneId: string): Promise<MilestoneRow> {
  const [row] = await reader.select().from(milestone).where(eq(milestone.id, milestoneId));
  if (!row) throw new AppError('not-found');
  return row;
}

/** Milestone and order for one who may do this to it. */
export async function milestoneFor(
  reader: Reader,
  actor: Actor | null,
  permission: Permission,
  milestoneId: string,
): Promise<{ milestone: MilestoneRow; order: OrderRow }> {
  const row = await unsafeMilestone(reader, milestoneId);
  return { milestone: row, order: await orderFor(reader, actor, permission, row.orderId) };
}

export async function piecesOf(reader: Reader, orderId: string): Promise<PieceRow[]> {
  return reader
    .select()
    .from(piece)
    .where(eq(piece.orderId, orderId))
    .orderBy(asc(piece.kind), asc(piece.position));
}

/** The newest order specification. */
export async function orderSpecificationOf(reader: Reader, orderId: string) {
  const [row] = await reader
    .select()
    .from(orderSpecification)
    .where(eq(orderSpecification.orderId, orderId))
    .orderBy(desc(orderSpecification.number))
    .limit(1);
  if (!row) throw new AppError('not-found');
  return row;
}

/** Open disputes of an order, or of one milestone: they block release, refund and the end of the order. */
export async function openDisputesOf(reader: Reader, where: { orderId: string } | { milestoneId: string }) {
  return reader
    .select({ id: dispute.id, milestoneId: dispute.milestoneId, state: dispute.state })
    .from(dispute)
    .where(
      and(
        'orderId' in where ? eq(dispute.orderId, where.orderId) : eq(dispute.milestoneId, where.milestoneId),
        inArray(dispute.state, [...openDisputeStates]),
      ),
    );
}

export function orderNumberText(order: { number: number }): string {
  return `O-${order.number}`;
}
