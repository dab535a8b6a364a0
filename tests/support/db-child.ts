import { sql } from 'drizzle-orm';
import { openDatabase, transact } from '../../src/lib/server/db/index.ts';
import { setting } from '../../src/lib/server/db/schema/platform.ts';

// Another process on the same file, for tests of locks and crashes.
//   hold <file> <ms>   holds the write lock for so long, telling when it has it and when it lets go
//   write <file>       commits one row after another until it is killed; each line is an acknowledged commit
const [mode, file, ms] = process.argv.slice(2);
if (!file) throw new Error('no file');
const db = openDatabase(`file:${file}`);
const say = (line: string) => process.stdout.write(`${line}\n`);

if (mode === 'hold') {
  await transact(db, async (tx) => {
    await tx.insert(setting).values({ key: 'held', value: 'yes' });
    say('holding');
    await new Promise((resolve) => setTimeout(resolve, Number(ms)));
  });
  say('released');
  db.$client.close();
} else if (mode === 'write') {
  for (let i = 0; ; i += 1) {
    await transact(db, async (tx) => {
      await tx.insert(setting).values({ key: `row-${i}`, value: 'a' });
      await tx.run(sql`insert into setting (key, value) values (${`pair-${i}`}, 'b')`);
    });
    say(`row-${i}`);
  }
}
