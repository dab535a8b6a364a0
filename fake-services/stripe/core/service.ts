/** What every resource works on: the state, the balance, the events and the request at hand. */
import type { Stripe } from 'stripe';
import { BalanceBook } from './balance.ts';
import type { Store } from './store.ts';
import type { ThinEvent } from './records.ts';

export const API_VERSION = '2026-10-28.endive';
const DAY = 86_400;

export interface ServiceSettings {
  /** Days until a card payment's funds are available. */
  payoutDelayDays: number;
  /** Seconds an onboarding link stays valid. */
  accountLinkSeconds: number;
}

export interface RequestInfo {
  id: string;
  idempotencyKey: string | null;
}

interface NewBalanceTransaction {
  type: Stripe.BalanceTransaction.Type;
  reportingCategory: string;
  amount: number;
  fee?: number;
  feeDescription?: string;
  currency: string;
  source: string | null;
  availableOn?: number;
  description?: string | null;
}

export class PaymentService {
  readonly store: Store;
  readonly settings: ServiceSettings;
  readonly balance: BalanceBook;
  /** Where people's browsers reach the hosted pages. */
  publicUrl = '';
  request: RequestInfo | null = null;
  /** Set by the deliverer. */
  onEvent: () => void = () => {};

  constructor(store: Store, settings: ServiceSettings) {
    this.store = store;
    this.settings = settings;
    this.balance = new BalanceBook(store);
  }

  now(): number {
    return this.store.now();
  }

  nowIso(): string {
    return new Date(this.store.nowMillis()).toISOString();
  }

  /** When the funds of a payment taken now become available. */
  fundsAvailableOn(bypassPending: boolean): number {
    return bypassPending ? this.now() : this.now() + this.settings.payoutDelayDays * DAY;
  }

  addBalanceTransaction(given: NewBalanceTransaction): Stripe.BalanceTransaction {
    const fee = given.fee ?? 0;
    const availableOn = given.availableOn ?? this.now();
    const row = {
      id: this.store.id('txn'),
      object: 'balance_transaction',
      amount: given.amount,
      available_on: availableOn,
      balance_type: 'payments',
      created: this.now(),
      currency: given.currency,
      description: given.description ?? null,
      exchange_rate: null,
      fee,
      fee_details:
        fee === 0
          ? []
          : [
              {
                amount: fee,
                application: null,
                currency: given.currency,
                description: given.feeDescription ?? 'Processing fees',
                type: 'stripe_fee',
              },
            ],
      net: given.amount - fee,
      reporting_category: given.reportingCategory,
      source: given.source,
      status: availableOn <= this.now() ? 'available' : 'pending',
      type: given.type,
    } satisfies Stripe.BalanceTransaction;
    this.store.tables.balanceTransactions.put(row.id, row);
    this.balance.add(row);
    return row;
  }

  /** Records a snapshot event and queues its delivery to every endpoint that asked for the type. */
  emit(type: Stripe.Event.Type, object: object, previous?: Record<string, unknown>): void {
    const targets = this.store.tables.endpoints
      .all()
      .filter(
        ({ object: endpoint }) => endpoint.status === 'enabled' && matches(endpoint.enabled_events, type),
      );
    const id = this.store.id('evt');
    const event = {
      id,
      object: 'event',
      api_version: API_VERSION,
      created: this.now(),
      data: {
        object: structuredClone(object) as Stripe.Event.Data.Object,
        ...(previous === undefined ? {} : { previous_attributes: previous }),
      },
      livemode: false,
      pending_webhooks: targets.length,
      request: { id: this.request?.id ?? null, idempotency_key: this.request?.idempotencyKey ?? null },
      type,
    } satisfies Record<keyof Omit<Stripe.EventBase, 'account' | 'context'>, unknown>;
    this.store.tables.events.put(id, event as Stripe.Event);
    for (const target of targets) this.queue(id, type, target.object.id, false);
  }

  /** Records a thin event: it names the object that changed and carries none of its content. */
  emitThin(type: string, related: ThinEvent['related_object'], data?: Record<string, unknown>): ThinEvent {
    const id = this.store.id('evt_test');
    const event: ThinEvent = {
      id,
      object: 'v2.core.event',
      type,
      created: this.nowIso(),
      livemode: false,
      related_object: related,
      reason:
        this.request === null
          ? null
          : {
              type: 'request',
              request: { id: this.request.id, idempotency_key: this.request.idempotencyKey ?? '' },
            },
      ...(data === undefined ? {} : { data }),
    };
    this.store.tables.thinEvents.put(id, event);
    for (const { object } of this.store.tables.destinations.all()) {
      if (object.status === 'enabled' && matches(object.enabled_events, type))
        this.queue(id, type, object.id, true);
    }
    return event;
  }

  queue(eventId: string, eventType: string, targetId: string, thin: boolean): void {
    const id = this.store.id('dlv');
    this.store.tables.deliveries.put(id, {
      id,
      eventId,
      eventType,
      targetId,
      thin,
      attempts: 0,
      state: 'waiting',
      nextAt: Date.now(),
      createdAt: this.now(),
      lastStatus: null,
    });
    this.onEvent();
  }
}

function matches(enabled: string[], type: string): boolean {
  return enabled.includes('*') || enabled.includes(type);
}
