import type { Stripe } from 'stripe';
import type { Store } from './store.ts';

interface Waiting {
  availableOn: number;
  net: number;
  currency: string;
}

/**
 * The platform's balance per currency, kept as running sums so that it costs the same with ten or with ten
 * thousand transactions. Rebuilt from the balance transactions at start.
 */
export class BalanceBook {
  private available: Record<string, number> = {};
  private waiting: Waiting[] = [];
  private readonly store: Store;

  constructor(store: Store) {
    this.store = store;
    this.rebuild();
  }

  rebuild(): void {
    this.available = {};
    this.waiting = [];
    for (const row of this.store.tables.balanceTransactions.all()) this.add(row);
  }

  add(row: Stripe.BalanceTransaction): void {
    this.waiting.push({ availableOn: row.available_on, net: row.net, currency: row.currency });
  }

  /** Moves what has become due and returns the currencies that gained available funds. */
  sweep(): string[] {
    const now = this.store.now();
    const gained = new Set<string>();
    this.waiting = this.waiting.filter((entry) => {
      if (entry.availableOn > now) return true;
      this.available[entry.currency] = (this.available[entry.currency] ?? 0) + entry.net;
      if (entry.net > 0) gained.add(entry.currency);
      return false;
    });
    return [...gained];
  }

  availableIn(currency: string): number {
    this.sweep();
    return this.available[currency] ?? 0;
  }

  pendingIn(currency: string): number {
    this.sweep();
    return this.waiting
      .filter((entry) => entry.currency === currency)
      .reduce((sum, entry) => sum + entry.net, 0);
  }

  currencies(): string[] {
    this.sweep();
    const known = new Set([...Object.keys(this.available), ...this.waiting.map((entry) => entry.currency)]);
    return known.size === 0 ? ['eur'] : [...known].sort();
  }

  /** All waiting funds become available now: a control call, the service has no such button. */
  release(): void {
    const now = this.store.now();
    for (const row of this.store.tables.balanceTransactions.all()) {
      if (row.available_on > now) {
        this.store.tables.balanceTransactions.put(row.id, { ...row, available_on: now, status: 'available' });
      }
    }
    this.waiting = this.waiting.map((entry) => ({ ...entry, availableOn: Math.min(entry.availableOn, now) }));
    this.sweep();
  }
}
