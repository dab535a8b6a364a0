import { and, count, desc, eq, inArray, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { can } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { question, request } from '../db/schema/requests.ts';
import type { DeskItem } from './desk.ts';

const mostDrafts = 5;
const mostOpen = 50;

const name = (row: { number: number; title: string }) =>
  `Request R-${row.number}${row.title ? `, ${row.title}` : ''}`;

async function unanswered(reader: Reader, ids: readonly string[]): Promise<Map<string, number>> {
  if (ids.length === 0) return new Map();
  const rows = await reader
    .select({ requestId: question.requestId, open: count() })
    .from(question)
    .where(and(inArray(question.requestId, [...ids]), isNull(question.answeredAt)))
    .groupBy(question.requestId);
  return new Map(rows.map((row) => [row.requestId, row.open]));
}

async function ofBuyers(reader: Reader, actor: Actor): Promise<DeskItem[]> {
  const mine = actor.memberships.filter((m) => can(actor, 'request.view-own', { companyId: m.companyId }));
  const ids = mine.map((m) => m.companyId);
  if (ids.length === 0) return [];
  const columns = {
    id: request.id,
    companyId: request.companyId,
    number: request.number,
    title: request.title,
    state: request.state,
    closesAt: request.closesAt,
  };
  const drafts = await reader
    .select(columns)
    .from(request)
    .where(and(inArray(request.companyId, ids), eq(request.state, 'draft')))
    .orderBy(desc(request.updatedAt))
    .limit(mostDrafts);
  const running = await reader
    .select(columns)
    .from(request)
    .where(and(inArray(request.companyId, ids), inArray(request.state, ['posted', 'closed', 're-opened'])))
    .orderBy(desc(request.updatedAt))
    .limit(mostOpen);
  const questions = await unanswered(
    reader,
    running.map((row) => row.id),
  );
  const items: DeskItem[] = [];
  for (const row of drafts) {
    if (!can(actor, 'request.edit', { companyId: row.companyId })) continue;
    items.push({
      id: `request/${row.id}/draft`,
      title: 'Finish the draft',
      detail: name(row),
      href: `/requests/${row.id}/compose`,
      dueAt: null,
      waitsFor: 'me',
    });
  }
  for (const row of running) {
    const open = questions.get(row.id) ?? 0;
    const object = { companyId: row.companyId };
    if (open > 0) {
      const answers = can(actor, 'question.answer', object);
      items.push({
        id: `request/${row.id}/questions`,
        title: open === 1 ? 'Answer a question' : `Answer ${open} questions`,
        detail: name(row),
        href: `/requests/${row.id}#questions`,
        dueAt: row.closesAt,
        waitsFor: answers ? 'me' : 'others',
        ...(answers ? {} : { who: 'engineer or purchaser' }),
      });
    }
    if (row.state === 'posted') {
      items.push({
        id: `request/${row.id}/bids`,
        title: 'Hand in bids',
        detail: name(row),
        href: `/requests/${row.id}`,
        dueAt: row.closesAt,
        waitsFor: 'others',
        who: 'bidders',
      });
    } else {
      const awards = can(actor, 'award.make', object);
      items.push({
        id: `request/${row.id}/award`,
        title: 'Compare the bids and award',
        detail: name(row),
        href: `/requests/${row.id}/compare`,
        dueAt: null,
        waitsFor: awards ? 'me' : 'others',
        ...(awards ? {} : { who: 'purchaser' }),
      });
    }
  }
  return items;
}

/** Questions of the actor's shops that the buyer has not answered. */
async function ofFabricators(reader: Reader, actor: Actor): Promise<DeskItem[]> {
  const ids = actor.memberships.filter((m) => m.kind === 'fabricator').map((m) => m.companyId);
  if (ids.length === 0) return [];
  const rows = await reader
    .select({
      id: question.id,
      requestId: request.id,
      number: request.number,
      title: request.title,
      closesAt: request.closesAt,
      buyer: company.name,
    })
    .from(question)
    .innerJoin(request, eq(request.id, question.requestId))
    .innerJoin(company, eq(company.id, request.companyId))
    .where(and(inArray(question.companyId, ids), isNull(question.answeredAt), eq(request.state, 'posted')))
    .limit(mostOpen);
  return rows.map((row) => ({
    id: `question/${row.id}`,
    title: 'Answer your question',
    detail: name(row),
    href: `/requests/${row.requestId}#questions`,
    dueAt: row.closesAt,
    waitsFor: 'others' as const,
    who: row.buyer,
  }));
}

/** What waits about requests: drafts, questions, bids to come, bids to compare. */
export async function requestDeskItems(reader: Reader, actor: Actor): Promise<DeskItem[]> {
  return [...(await ofBuyers(reader, actor)), ...(await ofFabricators(reader, actor))];
}
