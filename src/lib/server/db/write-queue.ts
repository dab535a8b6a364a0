import { AsyncLocalStorage } from 'node:async_hooks';
import { LibsqlError, type Client, type InArgs, type InStatement, type Transaction } from '@libsql/client';

/**
 * Writes wait in a first-in-first-out queue, reads pass. Two write transactions of one process would
 * otherwise collide for certain: the driver is synchronous, so the waiter blocks the very event loop
 * that the holder needs to finish. Another process holding the lock is met by reconnecting (after one
 * SQLITE_BUSY the connection cannot commit any more), a short sleep with jitter, and a new try.
 */

const busyDeadlineMs = 15_000;

interface Scope {
  transaction: boolean;
}
const scope = new AsyncLocalStorage<Scope>();

/** Runs `work` marked as inside a transaction, so that a write around it is refused loudly. */
export function insideTransaction<T>(work: () => Promise<T>): Promise<T> {
  return scope.run({ transaction: true }, work);
}

export function isBusy(error: unknown): boolean {
  for (let e: unknown = error; e instanceof Error; e = e.cause) {
    if (e instanceof LibsqlError && /^SQLITE_(BUSY|LOCKED)/.test(e.code)) return true;
    if (e.message.includes('cannot commit transaction - SQL statements in progress')) return true;
  }
  return false;
}

class Turnstile {
  #last: Promise<void> = Promise.resolve();

  async enter(): Promise<() => void> {
    const before = this.#last;
    let leave!: () => void;
    this.#last = new Promise((resolve) => (leave = resolve));
    await before;
    return leave;
  }
}

const readOnly = /^\s*(select|explain|pragma\s+\w+\s*;?\s*$)/i;

function sqlOf(statement: InStatement | string): string {
  return typeof statement === 'string' ? statement : statement.sql;
}

export async function sleepWithJitter(): Promise<void> {
  await new Promise((resolve) => setTimeout(resolve, 5 + Math.random() * 45));
}

async function retryBusy<T>(client: Client, work: () => Promise<T>): Promise<T> {
  const giveUpAt = Date.now() + busyDeadlineMs;
  for (;;) {
    try {
      return await work();
    } catch (error) {
      if (!isBusy(error) || Date.now() > giveUpAt) throw error;
      if (client.protocol === 'file') client.reconnect();
      await sleepWithJitter();
    }
  }
}

/** Wraps a libSQL client; see the note at the top of this file. */
export function queueWrites(client: Client): Client {
  const turnstile = new Turnstile();

  async function write<T>(work: () => Promise<T>): Promise<T> {
    if (scope.getStore()?.transaction) {
      throw new Error('A write outside the transaction was tried inside it; use the transaction handle.');
    }
    const leave = await turnstile.enter();
    try {
      return await retryBusy(client, work);
    } finally {
      leave();
    }
  }

  async function begin(): Promise<Transaction> {
    const leave = await turnstile.enter();
    let left = false;
    const leaveOnce = () => {
      if (!left) leave();
      left = true;
    };
    try {
      const transaction = await retryBusy(client, () => client.transaction('write'));
      return new Proxy(transaction, {
        get(target, property) {
          const value: unknown = Reflect.get(target, property, target);
          if (typeof value !== 'function') return value;
          const call = value.bind(target) as (...args: unknown[]) => unknown;
          if (property === 'commit' || property === 'rollback') {
            return async () => {
              try {
                await call();
              } finally {
                target.close();
                leaveOnce();
              }
            };
          }
          if (property === 'close') {
            return () => {
              call();
              leaveOnce();
            };
          }
          return call;
        },
      });
    } catch (error) {
      leaveOnce();
      throw error;
    }
  }

  const execute = (statement: InStatement | string, args?: InArgs) => {
    const run = () =>
      typeof statement === 'string' ? client.execute(statement, args) : client.execute(statement);
    return readOnly.test(sqlOf(statement)) ? run() : write(run);
  };

  return new Proxy(client, {
    get(target, property) {
      switch (property) {
        case 'execute':
          return execute;
        case 'transaction':
          return begin;
        case 'batch':
          return (...args: Parameters<Client['batch']>) => {
            const reads = args[0].every((statement) =>
              readOnly.test(Array.isArray(statement) ? statement[0] : sqlOf(statement)),
            );
            return reads ? target.batch(...args) : write(() => target.batch(...args));
          };
        case 'migrate':
          return (...args: Parameters<Client['migrate']>) => write(() => target.migrate(...args));
        case 'executeMultiple':
          return (...args: Parameters<Client['executeMultiple']>) =>
            write(() => target.executeMultiple(...args));
        default: {
          const value: unknown = Reflect.get(target, property, target);
          return typeof value === 'function' ? (value.bind(target) as unknown) : value;
        }
      }
    },
  });
}
