/**
 * Bundles what runs in plain Node beside the built application: the worker, the solver thread and the commands,
 * into `build/node`, with every package left outside. Production has no tsx.
 */
import { existsSync, readdirSync, rmSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { stripVTControlCharacters } from 'node:util';
import { rolldown } from 'rolldown';

const ROOT = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '../..');
const OUT = path.join(ROOT, 'build/node');
/** These belong to development: they start the stand-ins or make the build itself. */
const DEVELOPMENT_ONLY = new Set(['stack.ts', 'bundle.ts']);

function entries(): Record<string, string> {
  const cli = path.join(ROOT, 'src/cli');
  const commands = readdirSync(cli)
    .filter((name) => name.endsWith('.ts') && !name.endsWith('.test.ts') && !DEVELOPMENT_ONLY.has(name))
    .map((name) => [`cli/${name.slice(0, -'.ts'.length)}`, path.join(cli, name)] as const);
  const thread = path.join(ROOT, 'src/lib/server/checks/solve-thread.ts');
  return {
    worker: path.join(ROOT, 'src/worker.ts'),
    ...Object.fromEntries(commands),
    ...(existsSync(thread) ? { 'solve-thread': thread } : {}),
  };
}

async function bundle(): Promise<void> {
  rmSync(OUT, { recursive: true, force: true });
  const made = await rolldown({
    input: entries(),
    platform: 'node',
    // Bare names are packages, everything else is ours.
    external: (id) => !id.startsWith('.') && !path.isAbsolute(id),
    tsconfig: false,
  });
  await made.write({
    dir: OUT,
    format: 'esm',
    entryFileNames: '[name].js',
    chunkFileNames: 'chunks/[name]-[hash].js',
    sourcemap: true,
  });
  await made.close();
  process.stdout.write(`Bundled ${Object.keys(entries()).join(', ')}.\n`);
}

try {
  await bundle();
} catch (error) {
  process.stderr.write(
    `${error instanceof Error ? stripVTControlCharacters(error.message) : String(error)}\n`,
  );
  process.exitCode = 1;
}
