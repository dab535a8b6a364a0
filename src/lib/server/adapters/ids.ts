import { v7 as uuidv7 } from 'uuid';

/** A new id: UUIDv7 text, so that ids sort by the time they were made. */
export function newId(): string {
  return uuidv7();
}
