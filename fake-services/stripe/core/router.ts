import type { z } from 'zod';
import { parseParams } from './params.ts';
import type { PaymentService } from './service.ts';

type Method = 'GET' | 'POST' | 'DELETE';

export interface Route {
  method: Method;
  segments: string[];
  run: (service: PaymentService, rawParams: unknown, ids: string[]) => object;
}

/** Declares one call of the API: what it takes and what it does. Handlers are synchronous, hence atomic. */
export function route<S extends z.ZodType>(
  method: Method,
  path: string,
  schema: S,
  handle: (service: PaymentService, params: z.output<S>, id: string, secondId: string) => object,
): Route {
  return {
    method,
    segments: path.split('/').filter((part) => part !== ''),
    run: (service, raw, ids) => handle(service, parseParams(schema, raw), ids[0] ?? '', ids[1] ?? ''),
  };
}

export function matchRoute(
  routes: Route[],
  method: string,
  path: string,
): { route: Route; ids: string[] } | undefined {
  const parts = path.split('/').filter((part) => part !== '');
  for (const candidate of routes) {
    if (candidate.method !== method || candidate.segments.length !== parts.length) continue;
    const ids: string[] = [];
    const fits = candidate.segments.every((segment, index) => {
      const part = parts[index] ?? '';
      if (!segment.startsWith(':')) return segment === part;
      ids.push(decodeURIComponent(part));
      return true;
    });
    if (fits) return { route: candidate, ids };
  }
  return undefined;
}
