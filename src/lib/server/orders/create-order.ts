import { createHash } from 'node:crypto';
import type { MilestoneShare } from '../../domain/bid.ts';
import { AppError } from '../../domain/errors.ts';
import { splitByWeights, type Currency } from '../../domain/money.ts';
import { defaultOrderTerms, platformFeeBasisPoints } from '../../domain/order-terms.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit, type By } from '../audit/index.ts';
import { nextNumber } from '../db/counters.ts';
import type { Tx } from '../db/index.ts';
import { coilOrder, milestone, orderSpecification, piece } from '../db/schema/orders.ts';
import { acceptanceLines } from './specification.ts';

export interface CreateOrderInput {
  requestId: string;
  bidId: string;
  buyerCompanyId: string;
  fabricatorCompanyId: string;
  specificationId: string;
  /** The exact text that is hashed: JSON with `requirement` inside. */
  orderSpecificationBody: string;
  currency: Currency;
  /** All price lines, freight among them, without tax; minor units. */
  netAmount: number;
  taxAmount: number;
  freightAmount: number;
  /** net + tax. */
  totalAmount: number;
  leadTimeWorkingDays: number;
  quantity: number;
  milestonePlan: readonly MilestoneShare[];
  inspectionDays: number;
  buyerZone: string;
  title: string;
  needBy: string | null;
  /** Makes fixture pieces too. */
  withFixture?: boolean;
}

/** Amount and fee base of each milestone; both are split without losing a minor unit. */
export function milestoneMoney(
  input: Pick<CreateOrderInput, 'netAmount' | 'freightAmount' | 'totalAmount' | 'milestonePlan'>,
): { kind: MilestoneShare['kind']; amount: number; feeBase: number }[] {
  const weights = input.milestonePlan.map((share) => share.shareBp);
  const amounts = splitByWeights(input.totalAmount, weights);
  const bases = splitByWeights(input.netAmount - input.freightAmount, weights);
  return input.milestonePlan.map((share, index) => {
    const amount = amounts[index] ?? 0;
    return { kind: share.kind, amount, feeBase: Math.min(amount, bases[index] ?? 0) };
  });
}

function check(input: CreateOrderInput): void {
  const wrong = (detail: string) => new AppError('invalid-input', { detail });
  if (input.netAmount + input.taxAmount !== input.totalAmount)
    throw wrong('Net and tax do not add up to the total.');
  if (input.freightAmount < 0 || input.freightAmount > input.netAmount)
    throw wrong('Freight exceeds the net price.');
  if (input.totalAmount <= 0) throw wrong('An order needs a price above zero.');
  if (input.milestonePlan.reduce((sum, share) => sum + share.shareBp, 0) !== 10_000) {
    throw wrong('The milestone plan does not add up to 100 %.');
  }
  if (!Number.isInteger(input.quantity) || input.quantity < 1 || input.quantity > 1000) {
    throw wrong('The quantity is a whole number from 1 to 1000.');
  }
}

/**
 * Makes the order of an award: its order specification (hashed), milestones and pieces, in the
 * transaction of the award. The caller has authorised and told the parties. A second live order of the
 * same request or a second order of the same bid is a conflict.
 */
export async function createOrder(
  tx: Tx,
  by: By,
  input: CreateOrderInput,
): Promise<{ orderId: string; number: number }> {
  check(input);
  const money = milestoneMoney(input);
  if (money.some((m) => m.amount <= 0)) {
    throw new AppError('invalid-input', { detail: 'Each milestone needs an amount above zero.' });
  }
  acceptanceLines(input.orderSpecificationBody);
  const now = await businessNow(tx);
  const orderId = newId();
  const number = await nextNumber(tx, input.buyerCompanyId, 'order');
  const [made] = await tx
    .insert(coilOrder)
    .values({
      id: orderId,
      number,
      requestId: input.requestId,
      bidId: input.bidId,
      specificationId: input.specificationId,
      buyerCompanyId: input.buyerCompanyId,
      fabricatorCompanyId: input.fabricatorCompanyId,
      title: input.title,
      quantity: input.quantity,
      state: 'to-acknowledge',
      currency: input.currency,
      netAmount: input.netAmount,
      taxAmount: input.taxAmount,
      freightAmount: input.freightAmount,
      totalAmount: input.totalAmount,
      feeBasisPoints: platformFeeBasisPoints,
      inspectionDays: input.inspectionDays,
      buyerZone: input.buyerZone,
      leadTimeWorkingDays: input.leadTimeWorkingDays,
      needBy: input.needBy,
      terms: defaultOrderTerms,
      awardedAt: now,
      awardedBy: by === 'system' ? null : by.userId,
    })
    .onConflictDoNothing()
    .returning({ id: coilOrder.id });
  if (!made) {
    throw new AppError('state-conflict', { detail: 'This request has been awarded already.' });
  }
  await tx.insert(orderSpecification).values({
    id: newId(),
    orderId,
    number: 1,
    body: input.orderSpecificationBody,
    hash: createHash('sha256').update(input.orderSpecificationBody, 'utf8').digest('hex'),
    reason: 'award',
    createdAt: now,
  });
  await tx.insert(milestone).values(
    money.map((m, index) => ({
      id: newId(),
      orderId,
      position: index + 1,
      kind: m.kind,
      amount: m.amount,
      feeBase: m.feeBase,
      work: 'planned' as const,
      money: 'unfunded' as const,
    })),
  );
  const kinds = input.withFixture ? (['coil', 'fixture'] as const) : (['coil'] as const);
  await tx.insert(piece).values(
    kinds.flatMap((kind) =>
      Array.from({ length: input.quantity }, (_, index) => ({
        id: newId(),
        orderId,
        kind,
        position: index + 1,
        serial: `${number}-${kind === 'coil' ? '' : 'F'}${index + 1}`,
        state: 'planned' as const,
        createdAt: now,
      })),
    ),
  );
  await audit(tx, by, {
    action: 'order.create',
    subjectType: 'order',
    subjectId: orderId,
    companyId: input.buyerCompanyId,
    detail: { number, total: input.totalAmount, currency: input.currency },
  });
  return { orderId, number };
}
