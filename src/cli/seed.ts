import { mkdirSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { config } from '../lib/server/config/index.ts';
import { closeDatabase, database } from '../lib/server/db/index.ts';
import { closeSolvePool } from '../lib/server/checks/index.ts';
import { SeedWorld } from './seed/world.ts';
import { tellStory } from './seed/story.ts';

// Fills an empty database with the demo's invented story and writes who can sign in.
if (config().mode === 'production') {
  process.stderr.write('The demo data is not for production.\n');
  process.exit(2);
}
const world = new SeedWorld(database());
await tellStory(world, (line) => process.stdout.write(`  ${line}\n`));
mkdirSync(config().dataDir, { recursive: true });
writeFileSync(path.join(config().dataDir, 'sign-ins.json'), JSON.stringify(world.signIns, null, 2));
await closeSolvePool();
closeDatabase();
