import { eq, sql } from 'drizzle-orm';
import { z } from 'zod';
import { hourMs } from '../../domain/dates.ts';
import { currencies } from '../../domain/money.ts';
import type { CheckoutSession } from '../adapters/payments.ts';
import type { Tx } from '../db/index.ts';
import { paymentSession } from '../db/schema/money.ts';
import { moveMoney, setAttention, unsafeMilestone } from '../orders/index.ts';
import { raiseAlarm } from './alarms.ts';
import { AnswerDiffers, type OperationHandler } from './handler.ts';
import { metadataOf } from './operations.ts';

export type SessionRow = typeof paymentSession.$inferSelect;

export async function updateSession(
  tx: Tx,
  id: string,
  set: Partial<typeof paymentSession.$inferInsert>,
): Promise<void> {
  await tx
    .update(paymentSession)
    .set({ ...set, version: sql`${paymentSession.version} + 1` })
    .where(eq(paymentSession.id, id));
}

const checkoutRequest = z.object({
  sessionRowId: z.string(),
  orderId: z.string(),
  milestoneId: z.string(),
  amount: z.number().int().positive(),
  currency: z.enum(currencies),
  name: z.string(),
  description: z.string(),
  successUrl: z.string(),
  cancelUrl: z.string(),
  customerEmail: z.string(),
});

/** Opens the hosted payment page for a milestone. */
export const checkoutHandler: OperationHandler<CheckoutSession> = {
  call(payments, op) {
    const request = checkoutRequest.parse(op.request);
    return payments.createCheckoutSession({
      idempotencyKey: op.key,
      currency: request.currency,
      lines: [{ name: request.name, description: request.description, unitAmount: request.amount }],
      successUrl: request.successUrl,
      cancelUrl: request.cancelUrl,
      clientReferenceId: request.milestoneId,
      transferGroup: request.orderId,
      metadata: metadataOf(op),
      customerEmail: request.customerEmail,
    });
  },

  async find(payments, op) {
    // The clocks of both sides may differ; an hour of margin costs one page.
    for await (const session of payments.listSessions({ from: op.plannedAt - hourMs })) {
      if (session.metadata['purpose'] === op.purpose) return session;
    }
    return undefined;
  },

  async apply(tx, op, session) {
    const request = checkoutRequest.parse(op.request);
    if (session.amount !== request.amount || session.currency !== request.currency) {
      throw new AnswerDiffers(
        `Payment page ${session.id} asks ${session.amount} ${session.currency}; it should ask ${request.amount} ${request.currency}.`,
      );
    }
    const [row] = await tx.select().from(paymentSession).where(eq(paymentSession.id, request.sessionRowId));
    await updateSession(tx, request.sessionRowId, {
      sessionId: session.id,
      url: session.url,
      expiresAt: session.expiresAt,
      // The webhook may have been here first.
      ...(row?.state === 'opening' ? { state: 'open' as const } : {}),
    });
    return { objectId: session.id, result: { status: session.status } };
  },

  async refused(tx, op, error) {
    const request = checkoutRequest.parse(op.request);
    await updateSession(tx, request.sessionRowId, { state: 'lapsed' });
    const row = await unsafeMilestone(tx, request.milestoneId);
    if (row.money === 'paying') await moveMoney(tx, 'system', row, 'payment-lapsed');
    await setAttention(tx, row.id, 'payment-failed');
    await raiseAlarm(tx, {
      key: `checkout-refused:${op.id}`,
      kind: 'checkout-refused',
      orderId: request.orderId,
      milestoneId: request.milestoneId,
      detail: `The payment page could not be opened: ${error.message}`,
    });
  },
};

const expireRequest = z.object({ sessionId: z.string() });

/** Closes a payment page that must no longer be paid. */
export const expireSessionHandler: OperationHandler<CheckoutSession> = {
  call(payments, op) {
    const { sessionId } = expireRequest.parse(op.request);
    return payments.expireSession(sessionId, { idempotencyKey: op.key });
  },

  async find(payments, op) {
    const session = await payments.retrieveSession(expireRequest.parse(op.request).sessionId);
    return session.status === 'open' ? undefined : session;
  },

  apply(_tx, _op, session) {
    return Promise.resolve({ objectId: session.id, result: { status: session.status } });
  },

  // No longer open: paid or expired already, which its own event tells.
  refused: () => Promise.resolve(),
};
