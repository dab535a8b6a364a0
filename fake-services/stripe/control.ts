/**
 * What only a stand-in has: calls under `/_control` that move its clock, order trouble and play the part of
 * buyers, banks and the service's own staff. JSON in, JSON out, no key; never reached by product code.
 */
import { z } from 'zod';
import { TEST_CARDS, TEST_IBANS } from './cards.ts';
import type { Api } from './core/api.ts';
import type { Deliverer } from './core/delivery.ts';
import { missing } from './core/errors.ts';
import { faultSchema, type FaultList } from './core/faults.ts';
import type { PaymentService } from './core/service.ts';
import { pruneKeys, tick } from './core/ticks.ts';
import { findAccount, renderAccount, setTransfers } from './resources/accounts.ts';
import { findCharge } from './resources/charges.ts';
import { expireSession, findSession, paySession } from './resources/checkout-sessions.ts';
import { closeDispute, openDispute } from './resources/disputes.ts';
import { completeRefund, failRefund, fundWaitingRefunds } from './resources/refunds.ts';

export interface ControlContext {
  service: PaymentService;
  api: Api;
  deliverer: Deliverer;
  faults: FaultList;
}

type Handler = (context: ControlContext, body: unknown, id: string) => object | Promise<object>;

const done = { ok: true };

function setClock({ service, deliverer }: ControlContext, body: unknown): object {
  const given = z
    .strictObject({ advanceSeconds: z.number().int().optional(), offsetSeconds: z.number().int().optional() })
    .parse(body);
  const offset =
    given.offsetSeconds === undefined ? service.store.clockOffsetMillis : given.offsetSeconds * 1000;
  service.store.setClockOffset(offset + (given.advanceSeconds ?? 0) * 1000);
  tick(service);
  deliverer.wake(0);
  return { now: service.now(), offsetSeconds: service.store.clockOffsetMillis / 1000 };
}

const webhookSchema = z.strictObject({
  paused: z.boolean().optional(),
  drop: z.number().int().min(0).optional(),
  duplicate: z.number().int().min(0).optional(),
  delayMs: z.number().int().min(0).optional(),
  shuffle: z.boolean().optional(),
});

function setWebhooks({ deliverer }: ControlContext, body: unknown): object {
  const given = webhookSchema.parse(body);
  deliverer.faults = {
    paused: given.paused ?? deliverer.faults.paused,
    drop: given.drop ?? deliverer.faults.drop,
    duplicate: given.duplicate ?? deliverer.faults.duplicate,
    delayMs: given.delayMs ?? deliverer.faults.delayMs,
    shuffle: given.shuffle ?? deliverer.faults.shuffle,
  };
  deliverer.wake(0);
  return deliverer.faults;
}

/** Sends the event again to everyone who had it, even where it was delivered. */
function resend({ service, deliverer }: ControlContext, body: unknown): object {
  const { event } = z.strictObject({ event: z.string() }).parse(body);
  const earlier = service.store.tables.deliveries.all().filter((row) => row.eventId === event);
  const targets = new Map(earlier.map((row) => [row.targetId, row]));
  for (const row of targets.values()) service.queue(row.eventId, row.eventType, row.targetId, row.thin);
  deliverer.wake(0);
  return { queued: targets.size };
}

function dispute({ service }: ControlContext, body: unknown): object {
  const given = z
    .strictObject({
      charge: z.string(),
      amount: z.number().int().positive().optional(),
      reason: z.string().default('product_not_received'),
      inquiry: z.boolean().default(false),
    })
    .parse(body);
  const row = findCharge(service, given.charge);
  return openDispute(service, row, {
    amount: given.amount ?? row.object.amount,
    reason: given.reason,
    inquiry: given.inquiry,
  });
}

function disputeEnd(won: boolean): Handler {
  return ({ service }, _body, id) => {
    const found = service.store.tables.disputes.get(id);
    if (found === undefined) throw missing('dispute', id);
    closeDispute(service, found, won);
    return found;
  };
}

function account(state: 'active' | 'restricted' | 'rejected' | 'requested'): Handler {
  return ({ service }, _body, id) => {
    const record = findAccount(service, id);
    setTransfers(service, record, state);
    return renderAccount(record, ['configuration.recipient', 'requirements']);
  };
}

/** Money put into or taken out of the platform's balance from outside. */
function adjustBalance({ service }: ControlContext, body: unknown): object {
  const given = z.strictObject({ amount: z.number().int(), currency: z.string().default('eur') }).parse(body);
  const transaction = service.addBalanceTransaction({
    type: given.amount >= 0 ? 'topup' : 'payout',
    reportingCategory: given.amount >= 0 ? 'topup' : 'payout',
    amount: given.amount,
    currency: given.currency,
    source: null,
  });
  fundWaitingRefunds(service);
  return transaction;
}

/** What an account's holder draws out, so that a reversal can find it empty. */
function payoutAccount({ service }: ControlContext, body: unknown, id: string): object {
  const given = z
    .strictObject({ amount: z.number().int().positive(), currency: z.string().default('eur') })
    .parse(body);
  const record = findAccount(service, id);
  record.balances[given.currency] = (record.balances[given.currency] ?? 0) - given.amount;
  service.store.tables.accounts.put(id, record);
  return { balances: record.balances };
}

function pay({ service }: ControlContext, body: unknown, id: string): object {
  const given = z.strictObject({ card: z.string().default('4242424242424242') }).parse(body);
  const method = TEST_CARDS[given.card] ?? TEST_IBANS[given.card];
  if (method === undefined) throw missing('test number', given.card, 'card');
  const record = findSession(service, id);
  return { result: paySession(service, record, method), session: record.object };
}

function refundEnd(outcome: 'succeed' | 'fail'): Handler {
  return ({ service }, _body, id) => {
    const record = service.store.tables.refunds.get(id);
    if (record === undefined) throw missing('refund', id);
    if (outcome === 'fail') failRefund(service, record);
    else completeRefund(service, record);
    return record.object;
  };
}

const HANDLERS: Record<string, Handler> = {
  'GET clock': ({ service }) => ({
    now: service.now(),
    offsetSeconds: service.store.clockOffsetMillis / 1000,
  }),
  'POST clock': setClock,
  'GET requests': ({ api }) => ({ data: api.log }),
  'DELETE requests': ({ api }) => {
    api.log.length = 0;
    return done;
  },
  'GET faults': ({ faults }) => ({ data: faults.all() }),
  'POST faults': ({ faults }, body) => {
    faults.add(faultSchema.parse(body));
    return { data: faults.all() };
  },
  'DELETE faults': ({ faults }) => {
    faults.clear();
    return done;
  },
  'POST outage': ({ api }, body) => {
    api.outage = z.strictObject({ on: z.boolean() }).parse(body).on;
    return { on: api.outage };
  },
  'POST latency': ({ api }, body) => {
    api.latencyMs = z.strictObject({ ms: z.number().int().min(0).max(60_000) }).parse(body).ms;
    return { ms: api.latencyMs };
  },
  'POST webhooks': setWebhooks,
  'POST webhooks/flush': async ({ deliverer }) => {
    await deliverer.flush();
    return done;
  },
  'POST webhooks/resend': resend,
  'GET deliveries': ({ service }) => ({ data: service.store.tables.deliveries.all() }),
  'POST keys/prune': ({ service }) => {
    pruneKeys(service, service.now() + 1);
    return done;
  },
  'POST disputes': dispute,
  'POST disputes/:id/win': disputeEnd(true),
  'POST disputes/:id/lose': disputeEnd(false),
  'POST accounts/:id/activate': account('active'),
  'POST accounts/:id/restrict': account('restricted'),
  'POST accounts/:id/reject': account('rejected'),
  'POST accounts/:id/require': account('requested'),
  'POST accounts/:id/payout': payoutAccount,
  'POST balance': adjustBalance,
  'POST balance/release': ({ service }) => {
    service.balance.release();
    fundWaitingRefunds(service);
    return done;
  },
  'POST sessions/:id/pay': pay,
  'POST sessions/:id/expire': ({ service }, _body, id) => {
    expireSession(service, findSession(service, id));
    return done;
  },
  'POST refunds/:id/fail': refundEnd('fail'),
  'POST refunds/:id/succeed': refundEnd('succeed'),
  'POST reset': ({ service, api, deliverer, faults }, body) => {
    const { seed } = z.strictObject({ seed: z.string().optional() }).parse(body);
    service.store.reset(seed);
    service.balance.rebuild();
    deliverer.forget();
    faults.clear();
    api.outage = false;
    api.latencyMs = 0;
    api.log.length = 0;
    return done;
  },
};

/** `path` is what follows `/_control/`. Undefined when there is no such call. */
export async function control(
  context: ControlContext,
  method: string,
  path: string,
  body: unknown,
): Promise<object | undefined> {
  const parts = path.split('/');
  const direct = HANDLERS[`${method} ${path}`];
  const general =
    parts.length === 3 ? HANDLERS[`${method} ${parts[0] ?? ''}/:id/${parts[2] ?? ''}`] : undefined;
  const handler = direct ?? general;
  if (handler === undefined) return undefined;
  const result = await handler(context, body, parts[1] ?? '');
  context.service.store.commit();
  return structuredClone(result);
}
