import { sql } from 'drizzle-orm';
import { afterEach, beforeEach, expect, it } from 'vitest';
import { boardQuery } from '../../../src/lib/server/search/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';

let test: TestDatabase;
beforeEach(async () => {
  test = await testDatabase();
});
afterEach(() => test.close());

it('reads the board along its index, in order, without sorting or walking the whole table', async () => {
  for (const filter of [{}, { shape: 'helix', tubeMin: 0.008 }, { text: 'shaft' }]) {
    const query = boardQuery(test.db, filter, 1_800_000_000_000);
    const plan = await test.db.all<{ detail: string }>(sql`explain query plan ${query.getSQL()}`);
    const text = plan.map((row) => row.detail).join('\n');
    if (!('text' in filter)) expect(text).toContain('request_state_closes');
    expect(text).not.toMatch(/SCAN request(?!_)/);
    if (!('text' in filter)) expect(text).not.toContain('TEMP B-TREE FOR ORDER BY');
  }
});
