import { moveClock } from '../lib/server/adapters/clock.ts';
import { config } from '../lib/server/config/index.ts';
import { closeDatabase, database } from '../lib/server/db/index.ts';

// `advance 10d`, `advance 6h`: moves business time in demo and test, so that windows and deadlines can be seen.
const match = /^(\d+)([dhm])$/.exec(process.argv[2] ?? '');
if (!match || config().mode === 'production') {
  process.stderr.write('Usage (demo and test only): advance 10d | 6h | 30m\n');
  process.exit(2);
}
const unit = { d: 86_400_000, h: 3_600_000, m: 60_000 }[match[2] as 'd' | 'h' | 'm'];
const now = await moveClock(database(), Number(match[1]) * unit);
process.stdout.write(`Business time is now ${new Date(now).toISOString()}.\n`);
closeDatabase();
