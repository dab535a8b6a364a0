/** Sends signed webhooks: at least once, in no promised order, again and again until the other side says 2xx. */
import { createHmac } from 'node:crypto';
import type { DeliveryRecord } from './records.ts';
import type { PaymentService } from './service.ts';

/** The real service tries for up to three days. */
const GIVE_UP_AFTER = 3 * 86_400;

export interface DeliverySettings {
  /** Real milliseconds before the second, third … attempt; the last one repeats. */
  retryDelaysMs: number[];
  timeoutMs: number;
}

/** What control calls set: see control.ts. */
export interface DeliveryFaults {
  paused: boolean;
  /** The next n deliveries are lost: never sent, and not retried. */
  drop: number;
  /** The next n deliveries are sent twice. */
  duplicate: number;
  delayMs: number;
  /** Due deliveries are sent in random order instead of oldest first. */
  shuffle: boolean;
}

export const noFaults = (): DeliveryFaults => ({
  paused: false,
  drop: 0,
  duplicate: 0,
  delayMs: 0,
  shuffle: false,
});

export function sign(payload: string, secret: string, timestamp: number): string {
  const digest = createHmac('sha256', secret)
    .update(`${String(timestamp)}.${payload}`)
    .digest('hex');
  return `t=${String(timestamp)},v1=${digest}`;
}

interface Target {
  url: string;
  secret: string;
  payload: string;
}

export class Deliverer {
  faults: DeliveryFaults = noFaults();
  private readonly service: PaymentService;
  private readonly settings: DeliverySettings;
  private timer: NodeJS.Timeout | undefined;
  private running: Promise<void> | undefined;
  private stopped = false;
  /** Ids of what may still have to be sent, so that a long history costs nothing. */
  private waiting = new Set<string>();
  private known = 0;

  constructor(service: PaymentService, settings: DeliverySettings) {
    this.service = service;
    this.settings = settings;
    service.onEvent = () => this.wake(5);
    this.wake(5);
  }

  private target(record: DeliveryRecord): Target | undefined {
    const { tables } = this.service.store;
    if (record.thin) {
      const destination = tables.destinations.get(record.targetId);
      const event = tables.thinEvents.get(record.eventId);
      if (destination === undefined || event === undefined) return undefined;
      const { data: _content, ...notification } = event;
      return { url: destination.url, secret: destination.secret, payload: JSON.stringify(notification) };
    }
    const endpoint = tables.endpoints.get(record.targetId);
    const event = tables.events.get(record.eventId);
    if (endpoint === undefined || event === undefined) return undefined;
    return { url: endpoint.object.url, secret: endpoint.secret, payload: JSON.stringify(event, null, 2) };
  }

  private collect(): void {
    const { deliveries } = this.service.store.tables;
    if (deliveries.size === this.known) return;
    for (const row of deliveries.all().slice(deliveries.size < this.known ? 0 : this.known)) {
      if (row.state === 'waiting') this.waiting.add(row.id);
    }
    this.known = deliveries.size;
  }

  private waitingRows(): DeliveryRecord[] {
    this.collect();
    const rows: DeliveryRecord[] = [];
    for (const id of this.waiting) {
      const row = this.service.store.tables.deliveries.get(id);
      if (row === undefined || row.state !== 'waiting') this.waiting.delete(id);
      else rows.push(row);
    }
    return rows;
  }

  wake(delayMs: number): void {
    if (this.stopped) return;
    clearTimeout(this.timer);
    this.timer = setTimeout(() => void this.run(), delayMs);
    this.timer.unref();
  }

  private async run(): Promise<void> {
    if (this.running !== undefined) return;
    this.running = this.round();
    await this.running;
    this.running = undefined;
    const rows = this.waitingRows();
    if (rows.length === 0 || this.faults.paused) return;
    const next = Math.min(...rows.map((row) => row.nextAt));
    this.wake(Math.min(Math.max(next - Date.now(), 5), 60_000));
  }

  private async round(): Promise<void> {
    if (this.faults.paused) return;
    const now = Date.now();
    const due = this.waitingRows().filter((row) => row.nextAt <= now);
    if (this.faults.shuffle) due.sort(() => Math.random() - 0.5);
    // A few at a time, as the real service: the order of arrival is not the order of events.
    for (let at = 0; at < due.length && !this.stopped; at += 8) {
      await Promise.all(due.slice(at, at + 8).map((record) => this.attempt(record)));
      this.service.store.commit();
    }
  }

  private finish(record: DeliveryRecord, changes: Partial<DeliveryRecord>): void {
    this.service.store.tables.deliveries.put(record.id, { ...record, ...changes });
  }

  private async attempt(record: DeliveryRecord): Promise<void> {
    const target = this.target(record);
    if (target === undefined) return this.finish(record, { state: 'dropped' });
    if (this.faults.drop > 0) {
      this.faults.drop -= 1;
      return this.finish(record, { state: 'dropped' });
    }
    if (this.faults.delayMs > 0) await new Promise((resolve) => setTimeout(resolve, this.faults.delayMs));
    const copies = this.faults.duplicate > 0 ? 2 : 1;
    if (copies === 2) this.faults.duplicate -= 1;
    let status = 0;
    for (let copy = 0; copy < copies; copy += 1) status = await this.post(target);
    const attempts = record.attempts + 1;
    if (status >= 200 && status < 300) {
      return this.finish(record, { state: 'delivered', attempts, lastStatus: status });
    }
    const delays = this.settings.retryDelaysMs;
    const delay = delays[Math.min(attempts - 1, delays.length - 1)] ?? 60_000;
    const old = this.service.now() - record.createdAt > GIVE_UP_AFTER;
    this.finish(record, {
      attempts,
      lastStatus: status,
      ...(old ? { state: 'given-up' } : { nextAt: Date.now() + delay }),
    });
  }

  private async post(target: Target): Promise<number> {
    try {
      const response = await fetch(target.url, {
        method: 'POST',
        headers: {
          'content-type': 'application/json; charset=utf-8',
          'user-agent': 'Stripe/1.0 (+https://stripe.com/docs/webhooks)',
          // Receivers compare with their own clock, so the stamp is real time even when ours is shifted.
          'stripe-signature': sign(target.payload, target.secret, Math.floor(Date.now() / 1000)),
        },
        body: target.payload,
        redirect: 'manual',
        signal: AbortSignal.timeout(this.settings.timeoutMs),
      });
      await response.arrayBuffer();
      return response.status;
    } catch {
      return 0;
    }
  }

  /** Everything that waits is tried now, whatever its time, and the round is awaited. */
  async flush(): Promise<void> {
    while (this.running !== undefined) await this.running;
    for (const row of this.waitingRows()) this.finish(row, { nextAt: 0 });
    const paused = this.faults.paused;
    this.faults.paused = false;
    // Takes the place of the timer's round: two at once would send everything twice.
    this.running = this.round();
    await this.running;
    this.running = undefined;
    this.faults.paused = paused;
    this.service.store.commit();
  }

  /** Forget what was known of the tables, after a reset. */
  forget(): void {
    this.waiting = new Set();
    this.known = 0;
    this.faults = noFaults();
  }

  async stop(): Promise<void> {
    this.stopped = true;
    clearTimeout(this.timer);
    await this.running;
  }
}
