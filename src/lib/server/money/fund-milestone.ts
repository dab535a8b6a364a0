import { setTimeout as wait } from 'node:timers/promises';
import { and, count, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { milestoneKindText } from '../../domain/milestone-states.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { config } from '../config/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { paymentSession } from '../db/schema/money.ts';
import {
  milestoneFor,
  moveMoney,
  orderNumberText,
  type MilestoneRow,
  type OrderRow,
} from '../orders/index.ts';
import type { SessionRow } from './checkout-operations.ts';
import { executeOperation } from './execute.ts';
import { planOperation } from './operations.ts';

const openStates = ['opening', 'open', 'processing'] as const;

export async function openSessionOf(reader: Reader, milestoneId: string): Promise<SessionRow | undefined> {
  const [row] = await reader
    .select()
    .from(paymentSession)
    .where(and(eq(paymentSession.milestoneId, milestoneId), inArray(paymentSession.state, [...openStates])));
  return row;
}

/** Why a milestone cannot be funded now, in words; null when it can. */
export function fundingObstacle(
  order: Pick<OrderRow, 'state'>,
  row: Pick<MilestoneRow, 'work' | 'money'>,
): string | null {
  if (order.state === 'to-acknowledge') return 'The fabricator has not acknowledged the order yet.';
  if (order.state === 'done' || order.state === 'ended') return 'The order is closed.';
  if (row.work === 'cancelled') return 'This milestone is cancelled.';
  if (row.money !== 'unfunded' && row.money !== 'paying') return 'This milestone has been paid already.';
  return null;
}

async function openSession(tx: Tx, actor: Actor, order: OrderRow, row: MilestoneRow): Promise<SessionRow> {
  const [made] = await tx
    .select({ n: count() })
    .from(paymentSession)
    .where(eq(paymentSession.milestoneId, row.id));
  const attempt = (made?.n ?? 0) + 1;
  const sessionRowId = newId();
  const page = `${config().origin}/orders/${order.id}`;
  const name = milestoneKindText[row.kind];
  const operation = await planOperation(tx, {
    purpose: `checkout:${row.id}:${attempt}`,
    kind: 'checkout',
    orderId: order.id,
    milestoneId: row.id,
    request: {
      sessionRowId,
      orderId: order.id,
      milestoneId: row.id,
      amount: row.amount,
      currency: order.currency,
      name: `${name} milestone of order ${orderNumberText(order)}`,
      description: `${order.title}. Held by the platform until release.`,
      successUrl: `${page}?paid=${row.id}#milestone-${row.id}`,
      cancelUrl: `${page}?payment-left=${row.id}#milestone-${row.id}`,
      customerEmail: actor.email,
    },
    // The person waits for the page: the call is made at once, the job is only the safety net.
    delayMs: 0,
  });
  const [session] = await tx
    .insert(paymentSession)
    .values({
      id: sessionRowId,
      orderId: order.id,
      milestoneId: row.id,
      attempt,
      operationId: operation.id,
      amount: row.amount,
      currency: order.currency,
      state: 'opening',
      openedBy: actor.userId,
      openedAt: await businessNow(tx),
    })
    .returning();
  if (!session) throw new Error('the session was not written');
  if (row.money === 'unfunded') await moveMoney(tx, actor, row, 'start-payment', { attention: null });
  return session;
}

/**
 * Opens the hosted payment page of a milestone, or gives the one that is open already: a milestone never
 * has two. The money counts as held once the signed webhook says so, never on the browser's word.
 */
export async function fundMilestone(
  db: Database,
  actor: Actor | null,
  input: { milestoneId: string },
): Promise<{ url: string }> {
  const session = await transact(db, async (tx) => {
    const { milestone, order } = await milestoneFor(tx, actor, 'milestone.fund', input.milestoneId);
    const by = actor as Actor;
    requireVerifiedEmail(by);
    const obstacle = fundingObstacle(order, milestone);
    if (obstacle) throw new AppError('state-conflict', { detail: obstacle });
    return (await openSessionOf(tx, milestone.id)) ?? openSession(tx, by, order, milestone);
  });
  if (session.url) return { url: session.url };
  if (session.state === 'processing') {
    throw new AppError('state-conflict', {
      detail:
        'A payment of this milestone is under way at the bank. It is held as soon as the bank has confirmed it.',
    });
  }
  if (session.operationId) await executeOperation(db, session.operationId);
  // Another click may be making the very same call; its answer is ours too.
  for (let tries = 0; tries < 40; tries += 1) {
    const [row] = await db.select().from(paymentSession).where(eq(paymentSession.id, session.id));
    if (row?.url) return { url: row.url };
    if (row && row.state !== 'opening') break;
    await wait(100);
    if (tries === 10 && session.operationId) await executeOperation(db, session.operationId);
  }
  throw new AppError('payment-service', {
    detail: 'The payment page could not be opened just now. Nothing was taken; please try again in a moment.',
  });
}
