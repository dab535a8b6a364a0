import { and, eq, inArray, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import type { PayeeAccount, Payments } from '../adapters/payments.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { config } from '../config/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { payoutAccount } from '../db/schema/money.ts';
import { coilOrder, milestone } from '../db/schema/orders.ts';
import { lookAgain, setAttention, unsafeMilestone, unsafeOrder } from '../orders/index.ts';
import { executeOperation } from './execute.ts';
import { latestOperation, planOperation } from './operations.ts';
import { releasePurpose } from './close-money.ts';
import { planTransfer } from './move-held.ts';
import { paymentService } from './service.ts';
import { tellPayeeRestricted } from './tell-money.ts';

export type PayoutAccountRow = typeof payoutAccount.$inferSelect;

export async function payoutAccountOf(
  reader: Reader,
  companyId: string,
): Promise<PayoutAccountRow | undefined> {
  const [row] = await reader.select().from(payoutAccount).where(eq(payoutAccount.companyId, companyId));
  return row;
}

/** The payout account as its owner sees it; only reads. */
export async function viewPayoutAccount(reader: Reader, actor: Actor | null, companyId: string) {
  requireAccess(actor, 'company.payouts', { companyId });
  const row = await payoutAccountOf(reader, companyId);
  return {
    state: row?.state ?? ('none' as const),
    needs: row?.requirements ?? [],
    country: row?.country ?? null,
    checkedAt: row?.checkedAt ?? null,
  };
}

function pages(companyId: string) {
  const page = `${config().origin}/companies/${companyId}/payouts`;
  return { returnUrl: `${page}?returned=1`, refreshUrl: `${page}?again=1` };
}

/**
 * Starts or continues the onboarding of a payout account and gives the single-use page of the payment
 * service. Asking again always gives a fresh page, so a used or expired link is no dead end.
 */
export async function openOnboarding(
  db: Database,
  actor: Actor | null,
  input: { companyId: string; country: string },
): Promise<{ url: string }> {
  requireAccess(actor, 'company.payouts', { companyId: input.companyId });
  requireVerifiedEmail(actor);
  if (!/^[A-Z]{2}$/.test(input.country)) {
    throw new AppError('invalid-input', { fields: { country: 'Choose the country of the company.' } });
  }
  const operationId = await transact(db, async (tx) => {
    const existing = await payoutAccountOf(tx, input.companyId);
    if (existing?.accountId) return null;
    const [owner] = await tx.select().from(company).where(eq(company.id, input.companyId));
    if (!owner || owner.kind !== 'fabricator') throw new AppError('not-found');
    if (!existing) {
      await tx.insert(payoutAccount).values({
        id: newId(),
        companyId: input.companyId,
        state: 'onboarding',
        requirements: [],
        country: input.country,
        createdBy: actor.userId,
        createdAt: await businessNow(tx),
      });
      await audit(tx, actor, {
        action: 'payout-account.start',
        subjectType: 'company',
        subjectId: input.companyId,
        companyId: input.companyId,
      });
    }
    const purpose = `account:${input.companyId}`;
    const last = await latestOperation(tx, purpose);
    if (last && last.state !== 'failed') return last.id;
    const planned = await planOperation(tx, {
      purpose,
      kind: 'payout-account',
      companyId: input.companyId,
      request: {
        companyId: input.companyId,
        displayName: owner.name,
        contactEmail: actor.email,
        country: input.country,
      },
    });
    return planned.id;
  });
  if (operationId) await executeOperation(db, operationId);
  const row = await payoutAccountOf(db, input.companyId);
  if (!row?.accountId) throw new AppError('payment-service');
  try {
    const link = await paymentService().createAccountLink({
      idempotencyKey: `coilyard:account-link:${newId()}`,
      accountId: row.accountId,
      ...pages(input.companyId),
    });
    return { url: link.url };
  } catch (cause) {
    throw new AppError('payment-service', { cause });
  }
}

/** Asks the payment service for the present state of the account; the owner's button, and the webhook's job. */
export async function syncPayoutAccount(db: Database, payments: Payments, accountId: string): Promise<void> {
  const account = await payments.retrieveAccount(accountId);
  await transact(db, (tx) => applyAccount(tx, account));
}

export async function refreshPayoutAccount(
  db: Database,
  actor: Actor | null,
  input: { companyId: string },
): Promise<void> {
  requireAccess(actor, 'company.payouts', { companyId: input.companyId });
  const row = await payoutAccountOf(db, input.companyId);
  if (!row?.accountId) return;
  try {
    await syncPayoutAccount(db, paymentService(), row.accountId);
  } catch (cause) {
    if (cause instanceof AppError) throw cause;
    throw new AppError('payment-service', { cause });
  }
}

function stateOf(account: PayeeAccount, before: PayoutAccountRow['state']): PayoutAccountRow['state'] {
  if (account.canReceive) return 'ready';
  return before === 'ready' || before === 'restricted' || account.transfers === 'rejected'
    ? 'restricted'
    : 'onboarding';
}

/** Writes what the service says of an account, tells on a change, and lets waiting payouts go on. */
export async function applyAccount(tx: Tx, account: PayeeAccount): Promise<void> {
  const [row] = await tx.select().from(payoutAccount).where(eq(payoutAccount.accountId, account.id));
  if (!row) return;
  const state = stateOf(account, row.state);
  await tx
    .update(payoutAccount)
    .set({
      state,
      requirements: account.needs,
      checkedAt: await businessNow(tx),
      version: sql`${payoutAccount.version} + 1`,
    })
    .where(eq(payoutAccount.id, row.id));
  if (state === row.state) return;
  await audit(tx, 'system', {
    action: `payout-account.${state}`,
    subjectType: 'company',
    subjectId: row.companyId,
    companyId: row.companyId,
  });
  if (state === 'ready') {
    await tellReady(tx, row.companyId);
    await resumePayouts(tx, row.companyId);
  }
  if (state === 'restricted') await tellRestricted(tx, row);
}

async function tellReady(tx: Tx, companyId: string): Promise<void> {
  const href = `/companies/${companyId}/payouts`;
  await notifyCompany(tx, companyId, [], {
    kind: 'payout-account-ready',
    subject: 'Your payout account can receive money',
    content: {
      heading: 'Your payout account can receive money',
      paragraphs: [
        'The payment service has confirmed the account. Bids can be awarded to you, and releases are paid to it.',
      ],
      action: { label: 'Open payouts', path: href },
    },
    about: { type: 'company', id: companyId },
    href,
  });
}

async function tellRestricted(tx: Tx, account: PayoutAccountRow): Promise<void> {
  const href = `/companies/${account.companyId}/payouts`;
  await notifyCompany(tx, account.companyId, [], {
    kind: 'payout-account-attention',
    subject: 'Your payout account needs attention',
    content: {
      heading: 'Your payout account needs attention',
      paragraphs: [
        'The payment service does not let the account receive money at present. What is held for you stays held by the platform and goes out once the account is in order.',
      ],
      action: { label: 'Open payouts', path: href },
    },
    about: { type: 'company', id: account.companyId },
    href,
  });
  const held = await tx
    .select({ id: milestone.id, orderId: milestone.orderId })
    .from(milestone)
    .innerJoin(coilOrder, eq(coilOrder.id, milestone.orderId))
    .where(
      and(
        eq(coilOrder.fabricatorCompanyId, account.companyId),
        inArray(milestone.money, ['held', 'releasing', 'splitting']),
      ),
    );
  for (const { id, orderId } of held) {
    await tellPayeeRestricted(
      tx,
      await unsafeOrder(tx, orderId),
      await unsafeMilestone(tx, id),
      `${id}/${account.version}`,
    );
  }
}

/** Payouts that were refused because of the account are asked for again, under a new key. */
async function resumePayouts(tx: Tx, companyId: string): Promise<void> {
  const waiting = await tx
    .select({ id: milestone.id, orderId: milestone.orderId })
    .from(milestone)
    .innerJoin(coilOrder, eq(coilOrder.id, milestone.orderId))
    .where(and(eq(coilOrder.fabricatorCompanyId, companyId), eq(milestone.attention, 'payee-restricted')));
  for (const { id, orderId } of waiting) {
    const row = await unsafeMilestone(tx, id);
    await setAttention(tx, id, null);
    await lookAgain(tx, orderId);
    if (row.money !== 'releasing' && row.money !== 'splitting') continue;
    const op = await latestOperation(tx, releasePurpose(id));
    if (op?.state === 'failed')
      await planTransfer(tx, await unsafeOrder(tx, orderId), row, row.releaseAmount);
  }
}
