/**
 * `npm test`: everything that has to hold, on a machine where nothing is installed yet. Node built-ins only.
 *   --ci   plain output for a log (the same steps)
 * Steps: packages → Chromium → sync → types, lint, format, migrations and one build, two at a time → Vitest →
 * the whole stack and Playwright → the demo's own check on that build. Results are counted from the runners'
 * JSON reports; a report that is missing or a suite without tests is a failure. Last line: `N passed, N failed`.
 */
import { spawn } from 'node:child_process';
import { existsSync, mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import process from 'node:process';
import { installPackages, requireNode, root } from '../src/cli/bootstrap.mjs';
import { findChromium, installChromium } from './support/chromium.mjs';
import { countPlaywright, countVitest } from './support/reports.mjs';

requireNode();

const minute = 60_000;
const ci = process.argv.includes('--ci') || process.env['CI'] === 'true';
const reports = path.join(root, 'reports');
const scratch = mkdtempSync(path.join(tmpdir(), 'coilyard-test-'));
const startedAt = Date.now();

/** @type {Set<import('node:child_process').ChildProcess>} */
const children = new Set();
let passed = 0;
/** @type {string[]} */
const failures = [];
/** @type {string[]} */
const skipped = [];

/** @param {string} line */
const say = (line) => void process.stdout.write(`${line}\n`);
/** @param {number} since */
const seconds = (since) => `${((Date.now() - since) / 1000).toFixed(0)} s`;

/** Ends a child with all that it started: each child leads a process group of its own. */
function end(
  /** @type {import('node:child_process').ChildProcess} */ child,
  /** @type {NodeJS.Signals} */ signal,
) {
  if (child.pid === undefined || child.exitCode !== null || child.signalCode !== null) return;
  try {
    process.kill(-child.pid, signal);
  } catch {
    // Gone already.
  }
}

/**
 * @param {string[]} command
 * @param {{ env?: Record<string, string>, timeoutMs?: number, onLine?: (line: string) => void }} [options]
 * @returns {{ child: import('node:child_process').ChildProcess, done: Promise<{ code: number | null, output: string }> }}
 */
function start(command, options = {}) {
  const [program = '', ...args] = command;
  const child = spawn(program, args, {
    cwd: root,
    detached: true,
    env: {
      ...process.env,
      NO_COLOR: '1',
      FORCE_COLOR: '0',
      AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
      ...options.env,
    },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  children.add(child);
  let output = '';
  const keep = (/** @type {Buffer} */ chunk) => {
    output = (output + chunk.toString()).slice(-400_000);
  };
  child.stdout.on('data', keep);
  child.stderr.on('data', keep);
  const done = new Promise(
    (/** @type {(result: { code: number | null, output: string }) => void} */ resolve) => {
      const timer = setTimeout(
        () => {
          output += `\nstopped after ${(options.timeoutMs ?? 0) / minute} minutes`;
          end(child, 'SIGKILL');
        },
        options.timeoutMs ?? 10 * minute,
      );
      child.once('error', (error) => {
        output += error.message;
      });
      child.once('close', (code) => {
        clearTimeout(timer);
        children.delete(child);
        resolve({ code, output });
      });
    },
  );
  return { child, done };
}

/** @param {string} bin @param {string[]} args */
const node = (bin, ...args) => [process.execPath, path.join(root, 'node_modules', bin), ...args];

/** @param {string} output @param {number} lines */
const tail = (output, lines) => output.trimEnd().split('\n').slice(-lines).join('\n');

/** @param {string} name @param {boolean} ok @param {string} [detail] */
function count(name, ok, detail = '') {
  if (ok) passed += 1;
  else {
    failures.push(name);
    say(`FAILED  ${name}${detail === '' ? '' : `\n${detail}`}`);
  }
}

/** One step that counts as one test. @param {string} name @param {string[]} command @param {Parameters<typeof start>[1]} [options] */
async function step(name, command, options = {}) {
  const since = Date.now();
  const { code, output } = await start(command, options).done;
  count(name, code === 0, tail(output, 60));
  say(`${code === 0 ? 'ok     ' : 'failed '} ${name} (${seconds(since)})`);
  return code === 0;
}

/** @param {(() => Promise<unknown>)[]} tasks */
async function twoAtATime(tasks) {
  const waiting = [...tasks];
  const lane = async () => {
    for (let task = waiting.shift(); task !== undefined; task = waiting.shift()) await task();
  };
  await Promise.all([lane(), lane()]);
}

/**
 * Takes over what a runner's report says. A report that is missing, or a bad end with nothing failed in it
 * (an error outside of any test), is a failure of its own.
 * @param {string} runner
 * @param {import('./support/reports.mjs').Counted | undefined} counted
 * @param {{ code: number | null, output: string }} result
 * @param {number} since
 */
function take(runner, counted, result, since) {
  const before = failures.length;
  if (counted === undefined) count(`${runner}: no report`, false, tail(result.output, 80));
  else {
    passed += counted.passed;
    skipped.push(...counted.skipped);
    for (const { name, detail } of counted.failures) count(name, false, detail);
    if (result.code !== 0 && failures.length === before) count(runner, false, tail(result.output, 60));
  }
  const parts = [...(counted?.suites ?? [])].map(([suite, tests]) => `${suite} ${tests}`).join(', ');
  say(`${failures.length === before ? 'ok     ' : 'failed '} ${runner}: ${parts} (${seconds(since)})`);
}

async function vitest() {
  const since = Date.now();
  const file = path.join(reports, 'vitest.json');
  rmSync(file, { force: true });
  const result = await start(
    node('vitest/vitest.mjs', 'run', '--reporter=json', '--reporter=dot', `--outputFile.json=${file}`),
    { timeoutMs: 25 * minute },
  ).done;
  take('Vitest', countVitest(file, root), result, since);
}

/** @param {string} file @param {import('node:child_process').ChildProcess} child @param {number} timeoutMs */
async function appears(file, child, timeoutMs) {
  const deadline = Date.now() + timeoutMs;
  while (Date.now() < deadline && child.exitCode === null && child.signalCode === null) {
    if (existsSync(file)) return true;
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  return existsSync(file);
}

/** @param {string} chromium */
async function endToEnd(chromium) {
  const since = Date.now();
  const ready = path.join(scratch, 'stack.json');
  const stack = start(
    [
      process.execPath,
      '--import',
      'tsx',
      'src/cli/stack.ts',
      '--mode',
      'test',
      '--ports',
      'free',
      '--seed',
      '--data',
      path.join(scratch, 'e2e'),
      '--ready-file',
      ready,
    ],
    { timeoutMs: 40 * minute },
  );
  if (!(await appears(ready, stack.child, 10 * minute))) {
    end(stack.child, 'SIGTERM');
    count('the stack starts', false, tail((await stack.done).output, 60));
    return;
  }
  count('the stack starts', true);
  say(`ok      stack (${seconds(since)})`);
  const browserSince = Date.now();
  const file = path.join(reports, 'playwright.json');
  rmSync(file, { force: true });
  const result = await start(
    node('@playwright/test/cli.js', 'test', '--config', 'tests/playwright.config.ts'),
    {
      env: { CHROMIUM_PATH: chromium, COILYARD_STACK: ready, PLAYWRIGHT_JSON_OUTPUT_NAME: file },
      timeoutMs: 30 * minute,
    },
  ).done;
  take('Playwright', countPlaywright(file), result, browserSince);
  const alive = stack.child.exitCode === null;
  // To the stack alone: it stops its own children in order.
  stack.child.kill('SIGTERM');
  const { code, output } = await stack.done;
  count('the stack runs to the end and stops', alive && code === 0, tail(output, 40));
}

// --- The run ---------------------------------------------------------------------------------------------

async function main() {
  await installPackages();
  const found = findChromium() ?? (await installChromium(start, say));
  if (found === undefined) {
    process.stderr.write(
      'Chromium is needed for the browser tests: install it, or name it in CHROMIUM_PATH.\n',
    );
    return 2;
  }
  mkdirSync(reports, { recursive: true });
  say(`Node ${process.versions.node}, Chromium ${found}${ci ? ', CI' : ''}`);
  await step('svelte-kit sync', node('@sveltejs/kit/svelte-kit.js', 'sync'));
  let built = false;
  await twoAtATime([
    async () => {
      built = await step('build', [process.execPath, 'src/cli/build.mjs'], { timeoutMs: 15 * minute });
    },
    () =>
      step(
        'types (svelte-check)',
        node(
          'svelte-check/bin/svelte-check',
          '--tsconfig',
          './tsconfig.json',
          '--output',
          'human',
          '--threshold',
          'error',
        ),
        { timeoutMs: 15 * minute },
      ),
    () => step('lint (eslint)', node('eslint/bin/eslint.js', '.', '--quiet'), { timeoutMs: 15 * minute }),
    () => step('format (prettier)', node('prettier/bin/prettier.cjs', '--check', '--log-level', 'warn', '.')),
    () => step('migrations (drizzle-kit check)', node('drizzle-kit/bin.cjs', 'check')),
  ]);
  await vitest();
  if (built) {
    await endToEnd(found);
    await step(
      'demo --check',
      [process.execPath, 'src/cli/demo.mjs', '--check', '--data', path.join(scratch, 'demo')],
      { timeoutMs: 15 * minute },
    );
  } else {
    count('end-to-end: not run, the build failed', false);
  }
  return 0;
}

/** Every way out passes here: nothing that was started stays behind. */
async function cleanUp() {
  for (const child of children) end(child, 'SIGTERM');
  const deadline = Date.now() + 10_000;
  while (children.size > 0 && Date.now() < deadline) await new Promise((resolve) => setTimeout(resolve, 50));
  for (const child of children) end(child, 'SIGKILL');
  rmSync(scratch, { recursive: true, force: true });
}

for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM'])) {
  process.once(signal, () => void cleanUp().then(() => process.exit(130)));
}

let code = 0;
try {
  code = await main();
} catch (error) {
  count('the run itself', false, error instanceof Error ? error.message : String(error));
}
await cleanUp();
if (code === 0) {
  if (skipped.length > 0) say(`Skipped:\n${skipped.map((name) => `  ${name}`).join('\n')}`);
  if (failures.length > 0) say(`Failed:\n${failures.map((name) => `  ${name}`).join('\n')}`);
  say(`Total time ${seconds(startedAt)}`);
  say(`${passed} passed, ${failures.length} failed`);
  code = failures.length > 0 ? 1 : 0;
}
process.exitCode = code;
