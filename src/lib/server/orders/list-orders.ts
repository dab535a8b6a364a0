import { and, desc, eq, inArray, lt, or } from 'drizzle-orm';
import { alias } from 'drizzle-orm/sqlite-core';
import type { Actor } from '../../domain/actor.ts';
import { actOfWait, presentWaits } from '../../domain/waits.ts';
import { liveOrderStates, type OrderState } from '../../domain/order-states.ts';
import { can } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { coilOrder } from '../db/schema/orders.ts';
import { orderWaits } from './facts.ts';
import { companyOf, parties, type OrderRow, type Side } from './queries.ts';

export const orderFilters = ['open', 'closed'] as const;
export type OrderFilter = (typeof orderFilters)[number];

const buyer = alias(company, 'buyer');
const fabricator = alias(company, 'fabricator');
const pageSize = 25;

export interface OrderListItem {
  id: string;
  number: number;
  title: string;
  state: OrderState;
  side: Side;
  counterpart: string;
  currency: string;
  totalAmount: number;
  dueDate: string | null;
  awardedAt: number;
  /** The nearest wait and whether this person can end it. */
  next: { what: string; dueAt: number | null; owner: string; mine: boolean } | null;
}

function scopeOf(actor: Actor) {
  const ids = actor.memberships.map((m) => m.companyId);
  // An empty list never reaches SQL.
  return ids.length === 0
    ? null
    : or(inArray(coilOrder.buyerCompanyId, ids), inArray(coilOrder.fabricatorCompanyId, ids));
}

async function rowsFor(
  reader: Reader,
  actor: Actor,
  states: readonly OrderState[],
  limit: number,
  after: string | null,
): Promise<OrderRow[]> {
  const scope = scopeOf(actor);
  if (!scope) return [];
  const rows = await reader
    .select({ order: coilOrder, buyerName: buyer.name, fabricatorName: fabricator.name })
    .from(coilOrder)
    .innerJoin(buyer, eq(buyer.id, coilOrder.buyerCompanyId))
    .innerJoin(fabricator, eq(fabricator.id, coilOrder.fabricatorCompanyId))
    .where(and(scope, inArray(coilOrder.state, [...states]), ...(after ? [lt(coilOrder.id, after)] : [])))
    .orderBy(desc(coilOrder.id))
    .limit(limit);
  return rows.map((row) => ({ ...row.order, buyerName: row.buyerName, fabricatorName: row.fabricatorName }));
}

function sideIn(actor: Actor, order: OrderRow): Side {
  return actor.memberships.some((m) => m.companyId === order.buyerCompanyId) ? 'buyer' : 'fabricator';
}

async function item(reader: Reader, actor: Actor, order: OrderRow, now: number): Promise<OrderListItem> {
  const side = sideIn(actor, order);
  const waits = presentWaits(await orderWaits(reader, order), now);
  const next = waits[0];
  return {
    id: order.id,
    number: order.number,
    title: order.title,
    state: order.state,
    side,
    counterpart: side === 'buyer' ? order.fabricatorName : order.buyerName,
    currency: order.currency,
    totalAmount: order.totalAmount,
    dueDate: order.dueDate,
    awardedAt: order.awardedAt,
    next: next
      ? {
          what: next.what,
          dueAt: next.dueAt,
          owner:
            next.owner === 'platform'
              ? 'the platform'
              : next.owner === side
                ? 'a colleague'
                : next.owner === 'buyer'
                  ? order.buyerName
                  : order.fabricatorName,
          mine: next.owner === side && can(actor, actOfWait[next.kind], parties(order)),
        }
      : null,
  };
}

const closedStates = ['done', 'ended'] as const;

/** Orders of the actor's companies, newest first, a page at a time. */
export async function listOrders(
  reader: Reader,
  actor: Actor,
  options: { filter: OrderFilter; after?: string | null },
): Promise<{ items: OrderListItem[]; next: string | null; now: number }> {
  const now = await businessNow(reader);
  const states = options.filter === 'open' ? liveOrderStates : closedStates;
  const rows = await rowsFor(reader, actor, states, pageSize + 1, options.after ?? null);
  const shown = rows.slice(0, pageSize);
  const items: OrderListItem[] = [];
  for (const order of shown) items.push(await item(reader, actor, order, now));
  return { items, next: rows.length > pageSize ? (shown.at(-1)?.id ?? null) : null, now };
}

/** What waits in the actor's orders, for the desk: the nearest hundred orders are looked at. */
export async function orderDeskItems(reader: Reader, actor: Actor) {
  const now = await businessNow(reader);
  const items = [];
  for (const order of await rowsFor(reader, actor, liveOrderStates, 100, null)) {
    const side = sideIn(actor, order);
    const counterpart =
      companyOf(order, side) === order.buyerCompanyId ? order.fabricatorName : order.buyerName;
    for (const wait of presentWaits(await orderWaits(reader, order), now)) {
      const mine = wait.owner === side && can(actor, actOfWait[wait.kind], parties(order));
      items.push({
        id: `order/${wait.kind}/${wait.subjectId}`,
        title: wait.what,
        detail: `Order O-${order.number}, ${order.title}, ${counterpart}`,
        href: `/orders/${order.id}#${wait.anchor}`,
        dueAt: wait.dueAt,
        waitsFor: mine ? ('me' as const) : ('others' as const),
        ...(mine
          ? {}
          : {
              who:
                wait.owner === 'platform'
                  ? 'The platform'
                  : wait.owner === side
                    ? 'A colleague'
                    : counterpart,
            }),
      });
    }
  }
  return items;
}
