import { createHash } from 'node:crypto';
import type { Actor } from '../../src/lib/domain/actor.ts';
import { defaultMilestoneLimits, type Commercial } from '../../src/lib/domain/commercial.ts';
import { addDays, dateIn, endOfDate } from '../../src/lib/domain/dates.ts';
import type { BidFormValues } from '../../src/lib/schemas/forms/bid.ts';
import { exampleRequirement } from '../../src/lib/schemas/api/examples.ts';
import { businessNow } from '../../src/lib/server/adapters/clock.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { nextNumber } from '../../src/lib/server/db/counters.ts';
import { transact, type Database } from '../../src/lib/server/db/index.ts';
import { check, checkResult } from '../../src/lib/server/db/schema/checks.ts';
import { payoutAccount } from '../../src/lib/server/db/schema/money.ts';
import { request, specification } from '../../src/lib/server/db/schema/requests.ts';

/** A request as posting leaves it: draft, stored check, frozen specification. For tests of what follows. */
export async function aPostedRequest(
  db: Database,
  buyer: Actor,
  companyId: string,
  options: Partial<Commercial> & { title?: string; closesInDays?: number } = {},
): Promise<{ requestId: string; closesAt: number }> {
  const now = await businessNow(db);
  const zone = 'Europe/Berlin';
  const closesOn = addDays(dateIn(zone, now), options.closesInDays ?? 14);
  const closesAt = endOfDate(zone, closesOn);
  const requirement = exampleRequirement();
  const commercial: Commercial = {
    quantity: 1,
    firstArticle: false,
    needBy: null,
    deliveryTerm: 'DAP',
    deliveryPlace: 'Gate 2',
    currency: 'EUR',
    poNumber: 'PO-77',
    costCentre: 'H4',
    freeIssue: '',
    milestoneLimits: defaultMilestoneLimits,
    inspectionDays: 10,
    budget: 500_000,
    ...options,
    closesOn,
  };
  const requestId = newId();
  const checkId = newId();
  const specificationId = newId();
  const text = JSON.stringify(requirement);
  const body = JSON.stringify({ requirement, check: null });
  const sha = (value: string) => createHash('sha256').update(value).digest('hex');
  await transact(db, async (tx) => {
    await tx.insert(check).values({
      id: checkId,
      companyId,
      requestId,
      requestVersion: 1,
      requirementHash: sha(text),
      requirement: text,
      methodVersion: 'test',
      setting: 'default',
      state: 'done',
      createdAt: now,
      createdBy: buyer.userId,
    });
    await tx.insert(checkResult).values({ checkId, body: '{}' });
    await tx.insert(request).values({
      id: requestId,
      companyId,
      number: await nextNumber(tx, companyId, 'request'),
      title: options.title ?? 'Coil for pin ends',
      state: 'posted',
      form: { unitSet: 'metric', values: {} },
      requirement,
      commercial,
      currentSpecificationId: specificationId,
      closesAt,
      postedAt: now,
      buyerZone: zone,
      quantity: commercial.quantity,
      createdAt: now,
      updatedAt: now,
      createdBy: buyer.userId,
      commandId: newId(),
    });
    await tx.insert(specification).values({
      id: specificationId,
      requestId,
      number: 1,
      body,
      hash: sha(body),
      checkId,
      createdAt: now,
      createdBy: buyer.userId,
    });
  });
  return { requestId, closesAt };
}

/** What a bidder typed, whole and within the default limits; 30 days of validity after closing. */
export function bidValues(validUntil: string, options: Partial<BidFormValues> = {}): BidFormValues {
  return {
    body: {
      lines: [
        { kind: 'coil', label: 'Work coil', amount: 184_000 },
        { kind: 'freight', label: 'Freight', amount: 9_500 },
      ],
      taxLines: [{ kind: 'vat', rateBp: 1900, amount: 36_765 }],
      milestonePlan: [
        { kind: 'drawing', shareBp: 2000 },
        { kind: 'build', shareBp: 5000 },
        { kind: 'delivery', shareBp: 3000 },
      ],
      toolingOwner: 'none',
      warrantyMonths: 12,
      note: '',
    },
    leadTimeWorkingDays: 20,
    validUntil,
    exceptions: [],
    fileIds: [],
    ...options,
  };
}

/** A payout account that the payment service says can receive transfers. */
export async function aReadyPayout(db: Database, companyId: string): Promise<void> {
  await db.insert(payoutAccount).values({
    id: newId(),
    companyId,
    accountId: `acct_${companyId.slice(-8)}`,
    state: 'ready',
    requirements: [],
    country: 'DE',
    createdAt: await businessNow(db),
  });
}
