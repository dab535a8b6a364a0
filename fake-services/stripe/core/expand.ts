import { invalidParam } from './errors.ts';
import type { PaymentService } from './service.ts';

type Fetch = (service: PaymentService, id: string) => object | undefined;

/** Which table an id belongs to is told by its prefix. */
const BY_PREFIX: [string, Fetch][] = [
  ['pi_', (service, id) => service.store.tables.intents.get(id)?.object],
  ['ch_', (service, id) => service.store.tables.charges.get(id)?.object],
  ['txn_', (service, id) => service.store.tables.balanceTransactions.get(id)],
  ['trr_', (service, id) => service.store.tables.reversals.get(id)],
  ['tr_', (service, id) => service.store.tables.transfers.get(id)],
  ['re_', (service, id) => service.store.tables.refunds.get(id)?.object],
  ['du_', (service, id) => service.store.tables.disputes.get(id)],
];

/** Lists that are left out of an object unless asked for. */
const INCLUDABLE: Record<string, (service: PaymentService, id: string) => unknown> = {
  'charge.refunds': (service, id) => {
    const data = service.store.tables.refunds
      .all()
      .map((row) => row.object)
      .filter((refund) => refund.charge === id)
      .reverse();
    return {
      object: 'list',
      data: data.slice(0, 10),
      has_more: data.length > 10,
      url: `/v1/charges/${id}/refunds`,
    };
  },
};

export function registerIncludable(
  name: string,
  build: (service: PaymentService, id: string) => unknown,
): void {
  INCLUDABLE[name] = build;
}

function isObject(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function expandOne(service: PaymentService, target: unknown, path: string[], full: string): void {
  const [field, ...rest] = path;
  if (field === undefined) return;
  if (Array.isArray(target)) {
    for (const item of target) expandOne(service, item, path, full);
    return;
  }
  if (!isObject(target)) return;
  const includable = INCLUDABLE[`${String(target['object'])}.${field}`];
  const value = target[field];
  if (includable !== undefined && value === undefined) {
    target[field] = includable(service, String(target['id']));
  } else if (typeof value === 'string') {
    const fetch = BY_PREFIX.find(([prefix]) => value.startsWith(prefix))?.[1];
    const found = fetch?.(service, value);
    if (found === undefined) {
      throw invalidParam(undefined, `This property cannot be expanded (${full}).`, 'expand');
    }
    target[field] = structuredClone(found);
  } else if (value === undefined || typeof value === 'number' || typeof value === 'boolean') {
    throw invalidParam(undefined, `This property cannot be expanded (${full}).`, 'expand');
  }
  if (rest.length > 0) expandOne(service, target[field], rest, full);
}

/** A copy of the object with the asked ids replaced by the objects they name. */
export function expandObject(service: PaymentService, object: object, paths: string[] | undefined): object {
  const copy = structuredClone(object);
  for (const path of paths ?? []) {
    const steps = path.split('.');
    if (steps.length > 4) {
      throw invalidParam(
        undefined,
        `You cannot expand more than 4 levels of a property. Property: ${path}`,
        'expand',
      );
    }
    expandOne(service, copy, steps, path);
  }
  return copy;
}
