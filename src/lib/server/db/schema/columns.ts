import { integer, text } from 'drizzle-orm/sqlite-core';

/** Column shapes that recur: ids are UUIDv7 text, instants are integer milliseconds UTC. */
export const id = () => text('id').primaryKey();
export const instant = (name: string) => integer(name, { mode: 'number' });
export const flag = (name: string) => integer(name, { mode: 'boolean' });
/** Optimistic lock: a write names the version it saw. */
export const version = () => integer('version').notNull().default(1);
export const json = <T>(name: string) => text(name, { mode: 'json' }).$type<T>();
