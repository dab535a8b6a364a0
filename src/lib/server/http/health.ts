import { config } from '../config/index.ts';
import { database } from '../db/index.ts';
import { isMigrated } from '../db/migrate.ts';

/** True when the database answers and has the migrations this version was built with. */
export async function isReady(): Promise<boolean> {
  try {
    return await isMigrated(database(), config().database.migrationsDir);
  } catch {
    return false;
  }
}
