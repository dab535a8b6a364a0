import { createClient, type InValue } from '@libsql/client';
import { drizzle } from 'drizzle-orm/libsql';
import type { Database } from '../../src/lib/server/db/index.ts';

/**
 * Runs reads on a database file and gives the plan of each select: lines such as
 * `SEARCH t USING INDEX i (a=?)` (SQLite, "EXPLAIN QUERY PLAN").
 */
export async function plansOf(file: string, work: (db: Database) => Promise<unknown>): Promise<string[][]> {
  const client = createClient({ url: `file:${file}` });
  const asked: { sql: string; args: InValue[] }[] = [];
  const db = drizzle(client, {
    logger: { logQuery: (sql, args) => void asked.push({ sql, args: args as InValue[] }) },
  }) as unknown as Database;
  try {
    await work(db);
    const plans: string[][] = [];
    for (const { sql, args } of asked) {
      const plan = await client.execute({ sql: `explain query plan ${sql}`, args });
      plans.push(plan.rows.map((row) => String(row['detail'])));
    }
    return plans;
  } finally {
    client.close();
  }
}

/** Steps that read a whole table or sort what an index could have given in order. */
export function slowSteps(plans: readonly string[][], smallTables: readonly string[] = []): string[] {
  return plans
    .flat()
    .filter(
      (step) =>
        (/^SCAN (?!CONSTANT)/.test(step) && !/USING (COVERING )?INDEX/.test(step)) ||
        /TEMP B-TREE/.test(step),
    )
    .filter((step) => !smallTables.some((table) => step.startsWith(`SCAN ${table}`)));
}
