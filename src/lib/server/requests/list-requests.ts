import { and, count, desc, inArray, isNull, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { RequestState } from '../../domain/request-states.ts';
import { can } from '../access/index.ts';
import type { Reader } from '../db/index.ts';
import { question, request } from '../db/schema/requests.ts';

export interface RequestListItem {
  id: string;
  companyId: string;
  companyName: string;
  number: number;
  title: string;
  state: RequestState;
  closesAt: number | null;
  buyerZone: string | null;
  quantity: number | null;
  updatedAt: number;
  openQuestions: number;
}

const pageSize = 25;

/** The requests of the actor's buyer companies, the newest first; `before` is the last page's end. */
export async function listRequests(
  reader: Reader,
  actor: Actor,
  options: { states?: readonly RequestState[]; before?: string } = {},
): Promise<{ items: RequestListItem[]; next: string | null }> {
  const companies = actor.memberships.filter((m) =>
    can(actor, 'request.view-own', { companyId: m.companyId }),
  );
  if (companies.length === 0) return { items: [], next: null };
  const [at, id] = (options.before ?? '').split('_');
  const rows = await reader
    .select({
      id: request.id,
      companyId: request.companyId,
      number: request.number,
      title: request.title,
      state: request.state,
      closesAt: request.closesAt,
      buyerZone: request.buyerZone,
      quantity: request.quantity,
      updatedAt: request.updatedAt,
    })
    .from(request)
    .where(
      and(
        inArray(
          request.companyId,
          companies.map((m) => m.companyId),
        ),
        options.states && options.states.length > 0 ? inArray(request.state, [...options.states]) : undefined,
        at && id ? sql`(${request.updatedAt}, ${request.id}) < (${Number(at)}, ${id})` : undefined,
      ),
    )
    .orderBy(desc(request.updatedAt), desc(request.id))
    .limit(pageSize + 1);
  const page = rows.slice(0, pageSize);
  const open = await openQuestions(
    reader,
    page.map((row) => row.id),
  );
  const names = new Map(companies.map((m) => [m.companyId, m.companyName]));
  const last = page.at(-1);
  return {
    items: page.map((row) => ({
      ...row,
      companyName: names.get(row.companyId) ?? '',
      openQuestions: open.get(row.id) ?? 0,
    })),
    next: rows.length > pageSize && last ? `${last.updatedAt}_${last.id}` : null,
  };
}

async function openQuestions(reader: Reader, ids: readonly string[]): Promise<Map<string, number>> {
  if (ids.length === 0) return new Map();
  const rows = await reader
    .select({ requestId: question.requestId, open: count() })
    .from(question)
    .where(and(inArray(question.requestId, [...ids]), isNull(question.answeredAt)))
    .groupBy(question.requestId);
  return new Map(rows.map((row) => [row.requestId, row.open]));
}
