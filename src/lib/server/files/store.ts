import { AppError } from '../../domain/errors.ts';
import { createObjectStore, ObjectStoreError, type ObjectStore } from '../adapters/object-store.ts';
import { config } from '../config/index.ts';

export type { ObjectStore };

let shared: ObjectStore | undefined;
let given: ObjectStore | undefined;

/** The store of this process, made from the configuration at first use. */
export function objectStore(): ObjectStore {
  if (given) return given;
  shared ??= createObjectStore(config().storage);
  return shared;
}

/** For tests and commands that bring their own; `undefined` goes back to the configured one. */
export function useObjectStore(store: ObjectStore | undefined): void {
  given = store;
}

/** Runs calls to the store; when it does not answer as it should, that is told as such. */
export async function storing<T>(work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (cause) {
    if (cause instanceof ObjectStoreError) throw new AppError('storage-service', { cause });
    throw cause;
  }
}
