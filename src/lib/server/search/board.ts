import { and, asc, eq, gt, gte, inArray, lte, sql, type SQL } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dayMs } from '../../domain/dates.ts';
import { boardSchema, type Board } from '../../schemas/api/board.ts';
import { materialName } from '../../schemas/forms/materials.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { bid } from '../db/schema/bids.ts';
import { company } from '../db/schema/companies.ts';
import { request } from '../db/schema/requests.ts';

export interface BoardFilter {
  text?: string;
  shape?: string;
  material?: string;
  /** Largest outside dimension of the tube, m. */
  tubeMin?: number;
  tubeMax?: number;
  quantityMin?: number;
  quantityMax?: number;
  /** Bids close within so many days. */
  closesWithinDays?: number;
  /** End of the page before. */
  after?: string;
}

export const boardPageSize = 25;

/** Free text as a full-text query: every word, by its beginning; signs of the query language mean nothing. */
export function matchOf(text: string): string | null {
  const words = text.match(/[\p{L}\p{N}]+/gu) ?? [];
  return words.length === 0
    ? null
    : words
        .slice(0, 12)
        .map((word) => `"${word}"*`)
        .join(' ');
}

function conditions(filter: BoardFilter, now: number): SQL[] {
  const wanted: (SQL | undefined)[] = [eq(request.state, 'posted'), gt(request.closesAt, now)];
  if (filter.shape) wanted.push(eq(request.shape, filter.shape));
  if (filter.material) wanted.push(eq(request.material, filter.material));
  // Half a micrometre of room, so that 3/8 in and 9.525 mm find each other.
  if (filter.tubeMin !== undefined) wanted.push(gte(request.tubeSize, filter.tubeMin - 5e-7));
  if (filter.tubeMax !== undefined) wanted.push(lte(request.tubeSize, filter.tubeMax + 5e-7));
  if (filter.quantityMin !== undefined) wanted.push(gte(request.quantity, filter.quantityMin));
  if (filter.quantityMax !== undefined) wanted.push(lte(request.quantity, filter.quantityMax));
  if (filter.closesWithinDays !== undefined) {
    wanted.push(lte(request.closesAt, now + filter.closesWithinDays * dayMs));
  }
  const match = filter.text ? matchOf(filter.text) : null;
  if (match) {
    wanted.push(
      sql`${request.id} in (select request_id from request_search where request_search match ${match})`,
    );
  }
  const [at, id] = (filter.after ?? '').split('_');
  if (at && id && /^\d+$/.test(at)) {
    wanted.push(sql`(${request.closesAt}, ${request.id}) > (${Number(at)}, ${id})`);
  }
  return wanted.filter((one): one is SQL => one !== undefined);
}

/** The query of one page, apart, so that a test can ask how the database will run it. */
export function boardQuery(reader: Reader, filter: BoardFilter, now: number) {
  return reader
    .select({
      id: request.id,
      number: request.number,
      title: request.title,
      buyerName: company.name,
      shape: request.shape,
      tubeSize: request.tubeSize,
      material: request.material,
      requirement: request.requirement,
      commercial: request.commercial,
      closesAt: request.closesAt,
      postedAt: request.postedAt,
      buyerZone: request.buyerZone,
    })
    .from(request)
    .innerJoin(company, eq(company.id, request.companyId))
    .where(and(...conditions(filter, now)))
    .orderBy(asc(request.closesAt), asc(request.id))
    .limit(boardPageSize + 1);
}

type Row = Awaited<ReturnType<typeof boardQuery>>[number];

function itemOf(row: Row, myBid: string | null) {
  const { requirement, commercial } = row;
  if (!requirement || !commercial) throw new Error(`posted request ${row.id} without requirement`);
  const { winding } = requirement.coil;
  const { material } = requirement.part;
  return {
    id: row.id,
    number: row.number,
    title: row.title,
    buyerName: row.buyerName,
    shape: row.shape ?? winding.shape,
    tubeSize: row.tubeSize ?? 0,
    turns: 'turns' in winding ? winding.turns : null,
    insideDiameter: 'insideDiameter' in winding ? winding.insideDiameter : null,
    material: material.kind === 'library' ? materialName(material.id) : material.own.name,
    purpose: requirement.process.purpose,
    quantity: commercial.quantity,
    firstArticle: commercial.firstArticle,
    currency: commercial.currency,
    needBy: commercial.needBy,
    deliveryTerm: commercial.deliveryTerm,
    deliveryPlace: commercial.deliveryPlace,
    closesAt: row.closesAt ?? 0,
    postedAt: row.postedAt ?? 0,
    buyerZone: row.buyerZone ?? 'UTC',
    myBid,
  };
}

async function ownBids(reader: Reader, actor: Actor, ids: readonly string[]): Promise<Map<string, string>> {
  const companies = actor.memberships.filter((m) => m.kind === 'fabricator').map((m) => m.companyId);
  if (ids.length === 0 || companies.length === 0) return new Map();
  const rows = await reader
    .select({ requestId: bid.requestId, state: bid.state })
    .from(bid)
    .where(and(inArray(bid.requestId, [...ids]), inArray(bid.companyId, companies)));
  return new Map(rows.map((row) => [row.requestId, row.state]));
}

/** Open requests for verified fabricators, those that close first at the top. */
export async function boardPage(reader: Reader, actor: Actor, filter: BoardFilter): Promise<Board> {
  requireAccess(actor, 'board.view');
  const rows = await boardQuery(reader, filter, await businessNow(reader));
  const page = rows.slice(0, boardPageSize);
  const bids = await ownBids(
    reader,
    actor,
    page.map((row) => row.id),
  );
  const last = page.at(-1);
  return boardSchema.parse({
    items: page.map((row) => itemOf(row, bids.get(row.id) ?? null)),
    next: rows.length > boardPageSize && last ? `${last.closesAt}_${last.id}` : null,
  });
}
