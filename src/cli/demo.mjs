/**
 * `npm run demo`: brings up the real application with all its services on this machine, from nothing.
 *   --fresh        begin with empty data
 *   --check        start, sign in, stop
 *   --data FOLDER  where the data is kept (.data)
 * Node built-ins only: it runs before anything is installed.
 */
import { spawn } from 'node:child_process';
import { existsSync, readFileSync, rmSync } from 'node:fs';
import path from 'node:path';
import process from 'node:process';
import { parseArgs } from 'node:util';
import { build, buildIsCurrent, installPackages, requireNode, root } from './bootstrap.mjs';

requireNode();

function options() {
  try {
    return parseArgs({
      options: {
        fresh: { type: 'boolean', default: false },
        check: { type: 'boolean', default: false },
        data: { type: 'string', default: '.data' },
      },
    }).values;
  } catch (error) {
    process.stderr.write(
      `${error instanceof Error ? error.message : String(error)}\nUsage: npm run demo -- [--fresh] [--check] [--data FOLDER]\n`,
    );
    process.exit(2);
  }
}

/** @param {string} folder */
function runningIn(folder) {
  const file = path.join(folder, 'stack.pid');
  if (!existsSync(file)) return false;
  try {
    process.kill(Number(readFileSync(file, 'utf8')), 0);
    return true;
  } catch {
    return false;
  }
}

async function main() {
  const { fresh, check, data } = options();
  const dataDir = path.resolve(root, data);
  await installPackages();
  if (!buildIsCurrent()) {
    process.stdout.write('Building …\n');
    await build();
  }
  if (fresh) {
    if (runningIn(dataDir))
      throw new Error(`A demo is running on ${dataDir}. Stop it before starting afresh.`);
    rmSync(dataDir, { recursive: true, force: true });
  }
  const args = [
    '--import',
    'tsx',
    path.join(root, 'src/cli/stack.ts'),
    '--mode',
    'demo',
    '--data',
    dataDir,
    '--seed',
  ];
  if (check) args.push('--check');
  const stack = spawn(process.execPath, args, { cwd: root, stdio: 'inherit' });
  // Ctrl+C reaches the child by itself; a signal to this process alone has to be passed on.
  process.on('SIGINT', () => undefined);
  process.on('SIGTERM', () => stack.kill('SIGTERM'));
  return new Promise((resolve) => stack.once('close', (code) => resolve(code ?? 1)));
}

try {
  process.exitCode = await main();
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = 1;
}
