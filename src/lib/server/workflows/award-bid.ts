import { and, desc, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { approvalMachine } from '../../domain/bid.ts';
import { AppError } from '../../domain/errors.ts';
import { formatMoney, type Currency } from '../../domain/money.ts';
import { requestMachine } from '../../domain/request-states.ts';
import { resolveAcceptance } from '../../induction/check/resolve-acceptance.ts';
import type { CheckResult, Requirement } from '../../induction/check/types.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import {
  awardObstacles,
  bidById,
  companyTerms,
  exceptionsOf,
  filesOf,
  handedInBids,
  mailAwarded,
  mailNotSelected,
  moveBid,
  needsApproval,
  requestById,
} from '../bids/index.ts';
import { recipientsOf } from '../companies/recipients.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { approval, bid } from '../db/schema/bids.ts';
import { request, requestFile, specification } from '../db/schema/requests.ts';
import { transition } from '../db/transition.ts';
import { shareFile } from '../files/index.ts';
import { payoutReady } from '../money/index.ts';
import { createOrder } from '../orders/index.ts';
import { notify } from '../outbox/index.ts';

export type AwardOutcome =
  { kind: 'awarded'; orderId: string; number: number } | { kind: 'approval-asked'; approvalId: string };

type BidRow = Awaited<ReturnType<typeof bidById>>;
type RequestRow = Awaited<ReturnType<typeof requestById>>;

async function approvalFor(tx: Tx, bidRow: BidRow) {
  const rows = await tx
    .select()
    .from(approval)
    .where(
      and(eq(approval.kind, 'award'), eq(approval.subjectType, 'bid'), eq(approval.subjectId, bidRow.id)),
    )
    .orderBy(desc(approval.requestedAt));
  // A word given for another amount or version is not a word for this one.
  return rows.find(
    (row) =>
      row.payload.bidVersion === bidRow.version &&
      row.payload.totalAmount === bidRow.totalAmount &&
      row.payload.currency === bidRow.currency,
  );
}

async function askApproval(tx: Tx, actor: Actor, bidRow: BidRow, requestRow: RequestRow): Promise<string> {
  const others = (await recipientsOf(tx, requestRow.companyId, ['purchaser'])).filter(
    (recipient) => recipient.userId !== actor.userId,
  );
  if (others.length === 0) {
    throw new AppError('state-conflict', {
      detail:
        'This award is above your company’s limit and needs a second owner or purchaser; there is none yet. Invite one first.',
    });
  }
  const id = newId();
  await tx.insert(approval).values({
    id,
    kind: 'award',
    subjectType: 'bid',
    subjectId: bidRow.id,
    companyId: requestRow.companyId,
    requestedBy: actor.userId,
    requestedAt: await businessNow(tx),
    payload: {
      bidVersion: bidRow.version,
      totalAmount: bidRow.totalAmount,
      currency: bidRow.currency,
    },
  });
  const path = `/requests/${requestRow.id}/compare`;
  await notify(tx, others, {
    kind: 'approval-needed',
    subject: `Your approval is needed: award of R-${requestRow.number}`,
    content: {
      heading: `${actor.name} asks for your approval`,
      paragraphs: [
        `The award of R-${requestRow.number} “${requestRow.title}” is above your company’s limit, so a second member has to agree.`,
      ],
      facts: [['Total', formatMoney({ amount: bidRow.totalAmount, currency: bidRow.currency as Currency })]],
      action: { label: 'See the bids and decide', path },
    },
    about: { type: 'approval', id },
    href: path,
    dedupeKey: `approval-needed/${id}`,
  });
  return id;
}

/** Exact bytes of the order specification: the frozen specification, decided exceptions, and the bid's terms. */
async function orderSpecificationBody(tx: Tx, bidRow: BidRow, requestRow: RequestRow): Promise<string> {
  const [spec] = await tx.select().from(specification).where(eq(specification.id, bidRow.specificationId));
  if (!spec) throw new AppError('not-found');
  const frozen = JSON.parse(spec.body) as { requirement: Requirement; check?: CheckResult | null };
  const exceptions = await exceptionsOf(tx, [bidRow.id]);
  const terms = requestRow.commercial;
  return JSON.stringify({
    kind: 'order-specification',
    request: { id: requestRow.id, number: requestRow.number, title: requestRow.title },
    specification: { number: spec.number, hash: spec.hash },
    // The limits that as-built records are judged by stand in the lines themselves.
    requirement: {
      ...frozen.requirement,
      acceptance: resolveAcceptance(frozen.requirement.acceptance, frozen.check?.proposedAcceptance ?? []),
    },
    check: frozen.check ?? null,
    acceptedExceptions: exceptions
      .filter((row) => row.state === 'accepted')
      .map(({ subject, text }) => ({ subject, text })),
    refusedExceptions: exceptions
      .filter((row) => row.state === 'refused')
      .map(({ subject, text, reason }) => ({ subject, text, reason })),
    terms: {
      quantity: terms?.quantity ?? 1,
      firstArticle: terms?.firstArticle ?? false,
      deliveryTerm: terms?.deliveryTerm ?? null,
      deliveryPlace: terms?.deliveryPlace ?? '',
      needBy: terms?.needBy ?? null,
      leadTimeWorkingDays: bidRow.leadTimeWorkingDays,
      warrantyMonths: bidRow.body.warrantyMonths,
      toolingOwner: bidRow.body.toolingOwner,
      prices: bidRow.body.lines,
      taxes: bidRow.body.taxLines,
      currency: bidRow.currency,
      total: bidRow.totalAmount,
    },
  });
}

async function award(tx: Tx, actor: Actor, bidRow: BidRow, requestRow: RequestRow): Promise<AwardOutcome> {
  const terms = requestRow.commercial;
  if (!terms) throw new AppError('state-conflict');
  const company = await companyTerms(tx, requestRow.companyId);
  const awarded = await moveBid(tx, actor, bidRow, 'award', bidRow.version);
  await transition(tx, {
    machine: requestMachine,
    table: request,
    column: request.state,
    columnName: 'state',
    id: requestRow.id,
    from: requestRow.state,
    event: 'award',
    by: actor,
    companyId: requestRow.companyId,
  });
  for (const { bid: other } of await handedInBids(tx, requestRow.id)) {
    if (other.id === bidRow.id || !['submitted', 'to-confirm'].includes(other.state)) continue;
    const passed = await moveBid(tx, actor, other, 'pass-over');
    await mailNotSelected(tx, requestRow, passed);
  }
  const drafts = await tx
    .select()
    .from(bid)
    .where(and(eq(bid.requestId, requestRow.id), eq(bid.state, 'draft')));
  for (const draft of drafts) await moveBid(tx, actor, draft, 'pass-over');
  const order = await createOrder(tx, actor, {
    requestId: requestRow.id,
    bidId: bidRow.id,
    buyerCompanyId: requestRow.companyId,
    fabricatorCompanyId: bidRow.companyId,
    specificationId: bidRow.specificationId,
    orderSpecificationBody: await orderSpecificationBody(tx, awarded, requestRow),
    currency: bidRow.currency,
    netAmount: bidRow.netAmount,
    taxAmount: bidRow.taxAmount,
    freightAmount: bidRow.freightAmount,
    totalAmount: bidRow.totalAmount,
    leadTimeWorkingDays: bidRow.leadTimeWorkingDays,
    quantity: terms.quantity,
    milestonePlan: bidRow.body.milestonePlan,
    inspectionDays: terms.inspectionDays,
    buyerZone: requestRow.buyerZone ?? company.timeZone,
    title: requestRow.title,
    needBy: terms.needBy,
  });
  const attached = await tx.select().from(requestFile).where(eq(requestFile.requestId, requestRow.id));
  for (const { fileId } of attached) await shareFile(tx, fileId, [bidRow.companyId]);
  for (const file of await filesOf(tx, [bidRow.id])) await shareFile(tx, file.id, [requestRow.companyId]);
  await mailAwarded(tx, requestRow, awarded, order);
  return { kind: 'awarded', ...order };
}

async function obstaclesNow(tx: Tx, bidRow: BidRow, requestRow: RequestRow): Promise<string[]> {
  return awardObstacles({
    bid: bidRow,
    request: requestRow,
    exceptions: await exceptionsOf(tx, [bidRow.id]),
    payoutReady: await payoutReady(tx, bidRow.companyId),
    now: await businessNow(tx),
  });
}

/**
 * Awards a bid in one transaction: order, order specification, milestones and pieces are made, every
 * other bid becomes not selected. Above the company's limit it asks a second member instead. Of two
 * awards at one moment exactly one wins; the other is told that the request is awarded.
 */
export async function awardBid(
  db: Database,
  actor: Actor,
  input: { bidId: string; version: number },
): Promise<AwardOutcome> {
  return transact(db, async (tx) => {
    const bidRow = await bidById(tx, input.bidId);
    const requestRow = await requestById(tx, bidRow.requestId);
    requireAccess(actor, 'award.make', { companyId: requestRow.companyId });
    requireVerifiedEmail(actor);
    const obstacles = await obstaclesNow(tx, bidRow, requestRow);
    if (obstacles.length > 0) throw new AppError('state-conflict', { detail: obstacles.join(' ') });
    if (bidRow.version !== input.version) throw new AppError('version-conflict');
    if (needsApproval(await companyTerms(tx, requestRow.companyId), bidRow)) {
      const asked = await approvalFor(tx, bidRow);
      if (asked?.state === 'asked') {
        throw new AppError('state-conflict', { detail: 'A second member has been asked already.' });
      }
      if (asked?.state !== 'given') {
        return { kind: 'approval-asked', approvalId: await askApproval(tx, actor, bidRow, requestRow) };
      }
    }
    return award(tx, actor, bidRow, requestRow);
  });
}

/** The second member's word: given, the award follows at once; refused, the asker is told why. */
export async function decideApproval(
  db: Database,
  actor: Actor,
  input: { approvalId: string; decision: 'give' | 'refuse'; reason: string },
): Promise<AwardOutcome | { kind: 'refused' }> {
  return transact(db, async (tx) => {
    const [row] = await tx.select().from(approval).where(eq(approval.id, input.approvalId));
    if (!row) throw new AppError('not-found');
    requireAccess(actor, 'award.approve', { companyId: row.companyId, notUserId: row.requestedBy });
    requireVerifiedEmail(actor);
    if (input.decision === 'refuse' && input.reason.trim() === '') {
      throw new AppError('invalid-input', { fields: { reason: 'Say why.' } });
    }
    const bidRow = await bidById(tx, row.subjectId);
    const requestRow = await requestById(tx, bidRow.requestId);
    const stale = bidRow.version !== row.payload.bidVersion || bidRow.totalAmount !== row.payload.totalAmount;
    if (input.decision === 'give' && stale) {
      throw new AppError('state-conflict', { detail: 'The bid has changed since; please ask again.' });
    }
    await transition(tx, {
      machine: approvalMachine,
      table: approval,
      column: approval.state,
      columnName: 'state',
      id: row.id,
      from: row.state,
      event: input.decision,
      by: actor,
      companyId: row.companyId,
      set: {
        decidedBy: actor.userId,
        decidedAt: await businessNow(tx),
        reason: input.reason.trim(),
      },
    });
    if (input.decision === 'refuse') {
      const path = `/requests/${requestRow.id}/compare`;
      const asker = (await recipientsOf(tx, row.companyId, 'all')).filter(
        (recipient) => recipient.userId === row.requestedBy,
      );
      await notify(tx, asker, {
        kind: 'approval-refused',
        subject: `Approval refused: award of R-${requestRow.number}`,
        content: {
          heading: `${actor.name} does not agree to the award`,
          paragraphs: [input.reason.trim()],
          action: { label: 'Back to the bids', path },
        },
        about: { type: 'approval', id: row.id },
        href: path,
        dedupeKey: `approval-refused/${row.id}`,
      });
      return { kind: 'refused' };
    }
    const obstacles = await obstaclesNow(tx, bidRow, requestRow);
    if (obstacles.length > 0) throw new AppError('state-conflict', { detail: obstacles.join(' ') });
    return award(tx, actor, bidRow, requestRow);
  });
}
