// Until the first release there is one initial migration, made anew from the schema, and one with what
// Drizzle cannot say (triggers, full-text tables). After a release: `npm run db:generate` only.
// Made beside the old one and swapped in whole, so that a half-written schema file breaks nothing.
import { execFileSync } from 'node:child_process';
import { existsSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';

const fresh = `drizzle-new-${process.pid}`;
const old = `drizzle-old-${process.pid}`;
const kit = (...args) =>
  execFileSync(
    'npx',
    [
      'drizzle-kit',
      'generate',
      '--dialect',
      'turso',
      '--schema',
      './src/lib/server/db/schema/*.ts',
      '--out',
      `./${fresh}`,
      ...args,
    ],
    { stdio: ['ignore', 'ignore', 'inherit'] },
  );

try {
  kit('--name', 'initial');
  const dir = 'src/lib/server/db/sql';
  if (existsSync(dir)) {
    kit('--custom', '--name', 'by-hand');
    const parts = readdirSync(dir)
      .filter((name) => name.endsWith('.sql'))
      .sort()
      .map((name) => readFileSync(`${dir}/${name}`, 'utf8').trim());
    writeFileSync(`${fresh}/0001_by-hand.sql`, `${parts.join('\n--> statement-breakpoint\n')}\n`);
  }
  if (existsSync('drizzle')) renameSync('drizzle', old);
  renameSync(fresh, 'drizzle');
} finally {
  rmSync(fresh, { recursive: true, force: true });
  rmSync(old, { recursive: true, force: true });
}
