// Until the first release there is one initial migration, made anew from the schema, and one with what
// Drizzle cannot say (triggers, full-text tables). After a release: `npm run db:generate` only.
import { execFileSync } from 'node:child_process';
import { readdirSync, readFileSync, rmSync, writeFileSync, existsSync } from 'node:fs';

const kit = (...args) => execFileSync('npx', ['drizzle-kit', ...args], { stdio: ['ignore', 'ignore', 'inherit'] });
rmSync('drizzle', { recursive: true, force: true });
kit('generate', '--name', 'initial');
const dir = 'src/lib/server/db/sql';
if (existsSync(dir)) {
  kit('generate', '--custom', '--name', 'by-hand');
  const parts = readdirSync(dir)
    .filter((name) => name.endsWith('.sql'))
    .sort()
    .map((name) => readFileSync(`${dir}/${name}`, 'utf8').trim());
  writeFileSync('drizzle/0001_by-hand.sql', `${parts.join('\n--> statement-breakpoint\n')}\n`);
}
