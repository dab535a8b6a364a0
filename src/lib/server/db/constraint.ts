import { LibsqlError } from '@libsql/client';

/** True when a write failed because a value that must be unique is there already. */
export function isUniqueViolation(error: unknown): boolean {
  for (let e: unknown = error; e instanceof Error; e = e.cause) {
    if (e instanceof LibsqlError) {
      const code = e.extendedCode ?? e.code;
      if (code === 'SQLITE_CONSTRAINT_UNIQUE' || code === 'SQLITE_CONSTRAINT_PRIMARYKEY') return true;
    }
  }
  return false;
}
