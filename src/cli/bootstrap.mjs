/**
 * What has to be there before anything else runs: packages and the built application. Node built-ins only, since
 * this runs on a machine where nothing is installed yet.
 */
import { spawn } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import process from 'node:process';
import { fileURLToPath } from 'node:url';
import { stripVTControlCharacters } from 'node:util';

export const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '../..');

const oldestNode = [20, 19];

/** Says so and ends when this Node is too old to run the application. */
export function requireNode() {
  const [major = 0, minor = 0] = process.versions.node.split('.').map(Number);
  const [needMajor = 0, needMinor = 0] = oldestNode;
  if (major > needMajor || (major === needMajor && minor >= needMinor)) return;
  process.stderr.write(
    `Coilyard needs Node ${oldestNode.join('.')} or later; this is ${process.versions.node}.\n`,
  );
  process.exit(2);
}

/**
 * Runs a command to its end. `quiet` keeps its output for the caller instead of showing it.
 * @param {string} command
 * @param {string[]} args
 * @param {{ quiet?: boolean, env?: Record<string, string> }} [options]
 * @returns {Promise<{ code: number | null, output: string }>}
 */
export function run(command, args, options = {}) {
  return new Promise((resolve) => {
    const child = spawn(command, args, {
      cwd: root,
      env: { ...process.env, ...options.env },
      stdio: options.quiet ? ['ignore', 'pipe', 'pipe'] : ['ignore', 'inherit', 'inherit'],
    });
    let output = '';
    const keep = (/** @type {Buffer} */ chunk) => {
      output = (output + chunk.toString()).slice(-400_000);
    };
    child.stdout?.on('data', keep);
    child.stderr?.on('data', keep);
    child.once('error', (error) => resolve({ code: 127, output: error.message }));
    child.once('close', (code) => resolve({ code, output }));
  });
}

/** @param {string} file */
const hashOf = (file) => createHash('sha256').update(readFileSync(file)).digest('hex');

const installStamp = path.join(root, 'node_modules/.coilyard-lock');

/** Installs packages when the lock file is not the one they were installed from. */
export async function installPackages() {
  const wanted = hashOf(path.join(root, 'package-lock.json'));
  if (existsSync(installStamp) && readFileSync(installStamp, 'utf8') === wanted) return false;
  process.stdout.write('Installing packages …\n');
  const result = await run('npm', ['ci', '--no-audit', '--no-fund', '--loglevel=error'], { quiet: true });
  if (result.code !== 0)
    throw new Error(`npm ci ended with code ${result.code}:\n${result.output.trimEnd()}`);
  writeFileSync(installStamp, wanted);
  return true;
}

/**
 * @param {string} folder
 * @returns {string[]}
 */
function filesIn(folder) {
  return readdirSync(folder, { withFileTypes: true }).flatMap((entry) => {
    const full = path.join(folder, entry.name);
    if (entry.isDirectory()) return filesIn(full);
    return /\.test\.ts$/.test(entry.name) ? [] : [full];
  });
}

/** One hash of all that the build is made from. */
function sourceHash() {
  const files = ['src', 'static'].flatMap((folder) => filesIn(path.join(root, folder)));
  for (const name of ['package-lock.json', 'package.json', 'svelte.config.js', 'vite.config.ts'])
    files.push(path.join(root, name));
  const hash = createHash('sha256');
  for (const file of files.sort()) hash.update(`${path.relative(root, file)}\0${hashOf(file)}\n`);
  return hash.digest('hex');
}

const buildStamp = path.join(root, 'build/.source-hash');

/** Whether the built application was made from the sources as they are. */
export function buildIsCurrent() {
  return (
    existsSync(path.join(root, 'build/index.js')) &&
    existsSync(buildStamp) &&
    readFileSync(buildStamp, 'utf8') === sourceHash()
  );
}

/** Builds application and Node scripts. Returns what was printed; throws when it fails. */
export async function build() {
  const wanted = sourceHash();
  rmSync(path.join(root, 'build'), { recursive: true, force: true });
  const env = { NODE_ENV: 'production' };
  const steps = [
    [path.join(root, 'node_modules/vite/bin/vite.js'), 'build', '--logLevel', 'warn'],
    ['--import', 'tsx', path.join(root, 'src/cli/bundle.ts')],
  ];
  for (const args of steps) {
    const result = await run(process.execPath, args, { quiet: true, env });
    if (result.code !== 0)
      throw new Error(`The build failed:\n${stripVTControlCharacters(result.output).trimEnd()}`);
  }
  mkdirSync(path.dirname(buildStamp), { recursive: true });
  writeFileSync(buildStamp, wanted);
}
