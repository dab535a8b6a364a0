/** Builds application and Node scripts unless they are there from exactly these sources. */
import process from 'node:process';
import { build, buildIsCurrent } from './bootstrap.mjs';

try {
  if (!buildIsCurrent()) await build();
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = 1;
}
