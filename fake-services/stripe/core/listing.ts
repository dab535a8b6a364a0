import type { Stripe } from 'stripe';
import { invalidParam } from './errors.ts';

interface PageParams {
  limit?: number | undefined;
  starting_after?: string | undefined;
  ending_before?: string | undefined;
}

interface Row {
  id: string;
}

function assertLimit(limit: number, name: string): void {
  if (limit < 1 || limit > 100) {
    throw invalidParam(
      'parameter_invalid_integer',
      `This value must be between 1 and 100 (inclusive).`,
      name,
    );
  }
}

/** One page of a v1 list, newest first. */
export function listPage<T extends Row>(
  oldestFirst: T[],
  params: PageParams,
  url: string,
): Stripe.ApiList<T> {
  const limit = params.limit ?? 10;
  assertLimit(limit, 'limit');
  const rows = [...oldestFirst].reverse();
  const find = (id: string, name: string): number => {
    const at = rows.findIndex((row) => row.id === id);
    if (at < 0) throw invalidParam('resource_missing', `No such object: '${id}'`, name);
    return at;
  };
  if (params.starting_after !== undefined && params.ending_before !== undefined) {
    throw invalidParam(
      'parameters_exclusive',
      'You may only specify one of these parameters: starting_after, ending_before.',
    );
  }
  if (params.ending_before !== undefined) {
    const end = find(params.ending_before, 'ending_before');
    const start = Math.max(0, end - limit);
    return { object: 'list', data: rows.slice(start, end), has_more: start > 0, url };
  }
  const start = params.starting_after === undefined ? 0 : find(params.starting_after, 'starting_after') + 1;
  return {
    object: 'list',
    data: rows.slice(start, start + limit),
    has_more: start + limit < rows.length,
    url,
  };
}

type Range =
  | number
  | { gt?: number | undefined; gte?: number | undefined; lt?: number | undefined; lte?: number | undefined }
  | undefined;

export function inRange(value: number, range: Range): boolean {
  if (range === undefined) return true;
  if (typeof range === 'number') return value === range;
  return (
    (range.gt === undefined || value > range.gt) &&
    (range.gte === undefined || value >= range.gte) &&
    (range.lt === undefined || value < range.lt) &&
    (range.lte === undefined || value <= range.lte)
  );
}

export interface V2Page<T> {
  data: T[];
  next_page_url: string | null;
  previous_page_url: string | null;
}

/** One page of a v2 list: opaque page tokens in relative addresses. */
export function listPageV2<T>(
  oldestFirst: T[],
  params: { limit?: number | undefined; page?: string | undefined },
  path: string,
): V2Page<T> {
  const limit = params.limit ?? 20;
  assertLimit(limit, 'limit');
  const offset = params.page === undefined ? 0 : Number(Buffer.from(params.page, 'base64url').toString());
  if (!Number.isInteger(offset) || offset < 0)
    throw invalidParam('invalid_page', 'The page token is not valid.', 'page');
  const rows = [...oldestFirst].reverse();
  const link = (at: number) =>
    `${path}?limit=${String(limit)}&page=${Buffer.from(String(at)).toString('base64url')}`;
  return {
    data: rows.slice(offset, offset + limit),
    next_page_url: offset + limit < rows.length ? link(offset + limit) : null,
    previous_page_url: offset > 0 ? link(Math.max(0, offset - limit)) : null,
  };
}
