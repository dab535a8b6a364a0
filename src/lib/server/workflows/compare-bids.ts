import { and, desc, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import {
  bidStateText,
  exposureBeforeEvidence,
  milestoneAmounts,
  type BidState,
  type MilestoneKind,
} from '../../domain/bid.ts';
import type { Commercial } from '../../domain/commercial.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import {
  awardObstacles,
  companyTerms,
  exceptionsOf,
  filesOf,
  handedInBids,
  needsApproval,
  requestById,
} from '../bids/index.ts';
import type { Reader } from '../db/index.ts';
import { approval } from '../db/schema/bids.ts';
import { payoutReady } from '../money/index.ts';

export interface ComparedBid {
  id: string;
  number: number;
  version: number;
  state: BidState;
  stateWord: string;
  companyId: string;
  companyName: string;
  currency: string;
  /** Net without freight, freight, net delivered, tax, total: one basis for all bids. */
  goods: number;
  freight: number;
  net: number;
  tax: number;
  total: number;
  lines: { label: string; kind: string; amount: number }[];
  leadTimeWorkingDays: number;
  validUntil: string;
  milestones: { kind: MilestoneKind; shareBp: number; amount: number }[];
  exposure: number;
  toolingOwner: string;
  warrantyMonths: number;
  note: string;
  exceptions: {
    id: string;
    subject: string;
    text: string;
    state: string;
    reason: string;
    refusalConfirmed: boolean;
  }[];
  files: { id: string; name: string; size: number }[];
  /** Why it cannot be awarded now; empty when it can. */
  obstacles: string[];
  needsApproval: boolean;
}

/** The comparison for the buyer: every bid handed in, on one basis, cheapest first. */
export async function compareBids(reader: Reader, actor: Actor | null, requestId: string) {
  const request = await requestById(reader, requestId);
  requireAccess(actor, 'request.view-own', { companyId: request.companyId });
  requireAccess(actor, 'bid.compare', { companyId: request.companyId });
  const now = await businessNow(reader);
  const rows = await handedInBids(reader, requestId);
  const ids = rows.map((row) => row.bid.id);
  const exceptions = await exceptionsOf(reader, ids);
  const files = await filesOf(reader, ids);
  const terms = await companyTerms(reader, request.companyId);
  const bids: ComparedBid[] = [];
  for (const { bid, companyName } of rows) {
    const own = exceptions.filter((row) => row.bidId === bid.id);
    const amounts = milestoneAmounts(bid.totalAmount, bid.body.milestonePlan);
    bids.push({
      id: bid.id,
      number: bid.number,
      version: bid.version,
      state: bid.state,
      stateWord: bidStateText[bid.state],
      companyId: bid.companyId,
      companyName,
      currency: bid.currency,
      goods: bid.netAmount - bid.freightAmount,
      freight: bid.freightAmount,
      net: bid.netAmount,
      tax: bid.taxAmount,
      total: bid.totalAmount,
      lines: bid.body.lines,
      leadTimeWorkingDays: bid.leadTimeWorkingDays,
      validUntil: bid.validUntil,
      milestones: bid.body.milestonePlan.map((share, index) => ({ ...share, amount: amounts[index] ?? 0 })),
      exposure: exposureBeforeEvidence(bid.totalAmount, bid.body.milestonePlan),
      toolingOwner: bid.body.toolingOwner,
      warrantyMonths: bid.body.warrantyMonths,
      note: bid.body.note,
      exceptions: own.map(({ id, subject, text, state, reason, refusalConfirmed }) => ({
        id,
        subject,
        text,
        state,
        reason,
        refusalConfirmed,
      })),
      files: files.filter((row) => row.bidId === bid.id).map(({ id, name, size }) => ({ id, name, size })),
      obstacles: awardObstacles({
        bid,
        request,
        exceptions: own,
        payoutReady: await payoutReady(reader, bid.companyId),
        now,
      }),
      needsApproval: needsApproval(terms, bid),
    });
  }
  const approvals = await reader
    .select()
    .from(approval)
    .where(and(eq(approval.kind, 'award'), eq(approval.companyId, request.companyId)))
    .orderBy(desc(approval.requestedAt));
  return {
    request: {
      id: request.id,
      number: request.number,
      title: request.title,
      state: request.state,
      closesAt: request.closesAt,
      companyId: request.companyId,
      budget: (request.commercial as Commercial | null)?.budget ?? null,
      currency: (request.commercial as Commercial | null)?.currency ?? 'EUR',
      deliveryTerm: (request.commercial as Commercial | null)?.deliveryTerm ?? null,
      deliveryPlace: (request.commercial as Commercial | null)?.deliveryPlace ?? '',
    },
    bids,
    approvals: approvals
      .filter((row) => ids.includes(row.subjectId))
      .map((row) => ({
        id: row.id,
        bidId: row.subjectId,
        state: row.state,
        requestedBy: row.requestedBy,
        requestedAt: row.requestedAt,
        reason: row.reason,
        total: row.payload.totalAmount,
        version: row.version,
      })),
  };
}
export type Comparison = Awaited<ReturnType<typeof compareBids>>;
