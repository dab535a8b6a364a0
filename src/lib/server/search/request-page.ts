import { and, desc, eq, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { Commercial } from '../../domain/commercial.ts';
import { AppError } from '../../domain/errors.ts';
import type { FindingAnswer } from '../../domain/finding-answers.ts';
import type { RequestState } from '../../domain/request-states.ts';
import type { CheckResult, Requirement } from '../../induction/check/types.ts';
import { bidderRequestSchema, type BidderRequest } from '../../schemas/api/board.ts';
import { can, requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { bid } from '../db/schema/bids.ts';
import { company } from '../db/schema/companies.ts';
import { auditEvent } from '../db/schema/platform.ts';
import { coilOrder } from '../db/schema/orders.ts';
import {
  readSpecification,
  requestForUpdate,
  specificationOf,
  unsafeQuestions,
  unsafeRequestFiles,
  type RequestFileView,
  type RequestRow,
} from '../requests/index.ts';

export interface HistoryEntry {
  id: string;
  at: number;
  action: string;
  who: string;
}

export interface BuyerRequest {
  id: string;
  companyId: string;
  number: number;
  title: string;
  state: RequestState;
  version: number;
  closesAt: number | null;
  postedAt: number | null;
  buyerZone: string;
  withdrawReason: string;
  specification: { id: string; number: number; hash: string; createdAt: number } | null;
  commercial: Commercial | null;
  requirement: Requirement | null;
  check: CheckResult | null;
  answers: FindingAnswer[];
  files: RequestFileView[];
  questions: Awaited<ReturnType<typeof unsafeQuestions>>;
  bidsHandedIn: number;
  orderId: string | null;
  history: HistoryEntry[];
  may: { edit: boolean; withdraw: boolean; answer: boolean; compare: boolean };
}

async function history(reader: Reader, requestId: string): Promise<HistoryEntry[]> {
  const rows = await reader
    .select({
      id: auditEvent.id,
      at: auditEvent.at,
      action: auditEvent.action,
      name: user.name,
      kind: auditEvent.actorKind,
      companyId: auditEvent.companyId,
    })
    .from(auditEvent)
    .leftJoin(user, eq(user.id, auditEvent.actorUserId))
    .where(and(eq(auditEvent.subjectType, 'request'), eq(auditEvent.subjectId, requestId)))
    .orderBy(desc(auditEvent.at), desc(auditEvent.id))
    .limit(100);
  return rows.map((row) => ({
    id: row.id,
    at: row.at,
    action: row.action,
    // A bidder's person is not named to the buyer before there is an order.
    who:
      row.kind === 'system'
        ? 'by itself'
        : row.action === 'question.ask'
          ? 'a bidder'
          : (row.name ?? 'unknown'),
  }));
}

/** A request as its own company sees it. */
export async function requestForBuyer(reader: Reader, actor: Actor, row: RequestRow): Promise<BuyerRequest> {
  requireAccess(actor, 'request.view-own', { companyId: row.companyId });
  const specification = await specificationOf(reader, row.id);
  const body = specification ? readSpecification(specification.body) : null;
  const bids = await reader
    .select({ id: bid.id })
    .from(bid)
    .where(
      and(
        eq(bid.requestId, row.id),
        inArray(bid.state, ['submitted', 'to-confirm', 'awarded', 'not-selected']),
      ),
    );
  const [order] = await reader
    .select({ id: coilOrder.id })
    .from(coilOrder)
    .where(eq(coilOrder.requestId, row.id))
    .orderBy(desc(coilOrder.id))
    .limit(1);
  const object = { companyId: row.companyId };
  return {
    id: row.id,
    companyId: row.companyId,
    number: row.number,
    title: row.title,
    state: row.state,
    version: row.version,
    closesAt: row.closesAt,
    postedAt: row.postedAt,
    buyerZone: row.buyerZone ?? actor.timeZone,
    withdrawReason: row.withdrawReason,
    specification: specification
      ? {
          id: specification.id,
          number: specification.number,
          hash: specification.hash,
          createdAt: specification.createdAt,
        }
      : null,
    commercial: row.commercial,
    requirement: body?.requirement ?? row.requirement,
    check: body?.check ?? null,
    answers: body?.answers ?? [],
    files: await unsafeRequestFiles(reader, row.id),
    questions: await unsafeQuestions(reader, row.id),
    bidsHandedIn: bids.length,
    orderId: order?.id ?? null,
    history: await history(reader, row.id),
    may: {
      edit: can(actor, 'request.edit', object),
      withdraw: can(actor, 'request.withdraw', object),
      answer: can(actor, 'question.answer', object),
      compare: can(actor, 'bid.compare', object),
    },
  };
}

/** A request as a verified fabricator sees it: open ones all, later only where the company asked or bid. */
export async function requestForBidder(
  reader: Reader,
  actor: Actor,
  row: RequestRow,
): Promise<BidderRequest> {
  const mine = actor.memberships.filter((m) => m.kind === 'fabricator').map((m) => m.companyId);
  if (row.state === 'draft' || mine.length === 0) throw new AppError('not-found');
  requireAccess(actor, 'board.view');
  const questions = await unsafeQuestions(reader, row.id);
  const [own] = await reader
    .select({ state: bid.state })
    .from(bid)
    .where(and(eq(bid.requestId, row.id), inArray(bid.companyId, mine)));
  const open = row.state === 'posted' && (row.closesAt ?? 0) > (await businessNow(reader));
  if (!open && !own && !questions.some((one) => mine.includes(one.companyId)))
    throw new AppError('not-found');
  const specification = await specificationOf(reader, row.id);
  if (!specification) throw new AppError('not-found');
  const body = readSpecification(specification.body);
  const [buyer] = await reader
    .select({ name: company.name })
    .from(company)
    .where(eq(company.id, row.companyId));
  return bidderRequestSchema.parse({
    id: row.id,
    number: row.number,
    title: row.title,
    state: row.state === 'posted' && !open ? 'closed' : row.state,
    buyerName: buyer?.name ?? '',
    closesAt: row.closesAt,
    postedAt: row.postedAt,
    buyerZone: row.buyerZone ?? 'UTC',
    withdrawReason: row.withdrawReason,
    specification,
    commercial: body.commercial,
    requirement: body.requirement,
    check: body.check,
    carried: body.answers.filter((answer) => answer.kind === 'carried'),
    files: await unsafeRequestFiles(reader, row.id),
    questions: questions
      .filter(
        (one) => mine.includes(one.companyId) || (one.kind === 'clarification' && one.answeredAt !== null),
      )
      .map((one) => ({ ...one, mine: mine.includes(one.companyId) })),
    companies: open
      ? actor.memberships
          .filter((m) => can(actor, 'question.ask', { companyId: m.companyId }))
          .map((m) => ({ id: m.companyId, name: m.companyName }))
      : [],
    myBid: own?.state ?? null,
  });
}

/** A request by id, from the side of the reader. */
export async function requestPage(
  reader: Reader,
  actor: Actor,
  id: string,
): Promise<{ side: 'buyer'; request: BuyerRequest } | { side: 'bidder'; request: BidderRequest }> {
  const row = await requestForUpdate(reader, id);
  if (can(actor, 'request.view-own', { companyId: row.companyId })) {
    return { side: 'buyer', request: await requestForBuyer(reader, actor, row) };
  }
  return { side: 'bidder', request: await requestForBidder(reader, actor, row) };
}
