import { eq } from 'drizzle-orm';
import type { Role } from '../../domain/roles.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { By } from '../audit/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import type { Tx } from '../db/index.ts';
import { coilOrder, orderEvent } from '../db/schema/orders.ts';
import { orderNumberText, type OrderRow, type Side } from './queries.ts';

export interface OrderNews {
  /** kebab-case name of the event; the kind of its mails. */
  kind: string;
  by: By;
  /** On whose behalf; null when it happened by itself or the platform did it. */
  side: Side | null;
  milestoneId?: string | null;
  /** One sentence for the history and as the first paragraph of the mail. */
  text: string;
  subject: string;
  paragraphs?: string[];
  facts?: [string, string][];
  action: string;
  /** Place in the order room, e.g. `drawings`. */
  anchor?: string;
  /** Whose roles get the mail; `null` leaves a side out. Owners always get it. */
  buyer: readonly Role[] | 'all' | null;
  fabricator: readonly Role[] | 'all' | null;
  /** Said to one side only, beside the common paragraphs. */
  onlyBuyer?: string[];
  onlyFabricator?: string[];
  dedupeKey?: string;
}

/**
 * Writes what happened into the history of the order and tells both companies by mail and notification,
 * in the transaction of the event itself.
 */
export async function tell(tx: Tx, order: OrderRow, news: OrderNews): Promise<void> {
  const at = await businessNow(tx);
  const companyId =
    news.side === 'buyer'
      ? order.buyerCompanyId
      : news.side === 'fabricator'
        ? order.fabricatorCompanyId
        : null;
  await tx.insert(orderEvent).values({
    id: newId(),
    orderId: order.id,
    milestoneId: news.milestoneId ?? null,
    kind: news.kind,
    text: news.text,
    userId: news.by === 'system' || news.by.isAdmin ? null : news.by.userId,
    companyId,
    at,
  });
  // Whatever happened may have changed what is waited for.
  await tx.update(coilOrder).set({ nextCheckAt: 0 }).where(eq(coilOrder.id, order.id));
  const href = `/orders/${order.id}${news.anchor ? `#${news.anchor}` : ''}`;
  const number = orderNumberText(order);
  const send = async (side: Side, roles: readonly Role[] | 'all', own: string[]) => {
    const other = side === 'buyer' ? order.fabricatorName : order.buyerName;
    await notifyCompany(tx, side === 'buyer' ? order.buyerCompanyId : order.fabricatorCompanyId, roles, {
      kind: news.kind,
      subject: `${number}: ${news.subject}`,
      content: {
        heading: news.subject,
        paragraphs: [news.text, ...(news.paragraphs ?? []), ...own],
        facts: [
          ['Order', `${number}, ${order.title}`],
          [side === 'buyer' ? 'Fabricator' : 'Buyer', other],
          ...(news.facts ?? []),
        ],
        action: { label: news.action, path: href },
      },
      about: { type: 'order', id: order.id },
      href,
      ...(news.dedupeKey ? { dedupeKey: `${news.dedupeKey}/${side}` } : {}),
    });
  };
  if (news.buyer) await send('buyer', news.buyer, news.onlyBuyer ?? []);
  if (news.fabricator) await send('fabricator', news.fabricator, news.onlyFabricator ?? []);
}
