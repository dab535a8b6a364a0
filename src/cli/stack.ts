/**
 * Brings up the whole application on this machine: stand-ins of the outside services, database, webhooks, seed,
 * application and worker. The demo, the end-to-end tests, load and kill runs all start here.
 */
import { existsSync, mkdirSync, renameSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { parseArgs } from 'node:util';
import { waitForHealth } from './stack/health.ts';
import { lock, closers, type Closers } from './stack/lock.ts';
import { choosePorts, FIXED_PORTS, FREE_PORTS, type StackPorts } from './stack/ports.ts';
import { ManagedProcess, runCommand, type CommandResult } from './stack/process.ts';
import { readSignIns, signInTable, trySignIn, type SignIn } from './stack/sign-ins.ts';
import { environment, SECRET_KEY, startServices, type Services } from './stack/services.ts';
import { registerWebhooks } from './stack/webhooks.ts';

export interface StackOptions {
  mode: 'demo' | 'test';
  /** Database, stand-ins' state, objects, mails, logs. */
  dataDir: string;
  ports?: StackPorts;
  /** Fill an empty database with the demo scenario. */
  seed?: boolean;
  /** Folder of the built application. */
  build?: string;
  /** More environment for application, worker and commands. */
  env?: Record<string, string>;
  say?: (line: string) => void;
}

export { FIXED_PORTS, FREE_PORTS };

export interface Stack extends Services {
  origin: string;
  dataDir: string;
  ports: StackPorts;
  env: Record<string, string>;
  app: ManagedProcess;
  worker: ManagedProcess;
  signIns: SignIn[];
  /** Runs `src/cli/<name>` in the stack's environment. */
  command: (name: string, args?: string[]) => Promise<CommandResult>;
  /** Waits until the application answers that it is ready. */
  waitUntilReady: () => Promise<void>;
  stop: () => Promise<void>;
}

const ROOT = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '../..');
const COMMAND_TIMEOUT_MS = 10 * 60_000;

/** The bundled script where there is one, else the source through tsx. */
function script(build: string, bundled: string, source: string): string[] {
  const file = path.join(build, 'node', bundled);
  return existsSync(file) ? [file] : ['--import', 'tsx', path.join(ROOT, source)];
}

/** Starts everything and returns when the application is ready. What was started is stopped if anything fails. */
export async function startStack(options: StackOptions): Promise<Stack> {
  const dataDir = path.resolve(options.dataDir);
  const build = path.resolve(options.build ?? path.join(ROOT, 'build'));
  const say = options.say ?? (() => undefined);
  mkdirSync(dataDir, { recursive: true });
  const onStop = closers();
  onStop.add(lock(dataDir));
  try {
    return await bringUp({ ...options, dataDir }, build, say, onStop);
  } catch (error) {
    await onStop.run();
    throw error;
  }
}

function startProcesses(build: string, env: Record<string, string>, logDir: string, onStop: Closers) {
  const app = new ManagedProcess({
    name: 'app',
    args: [path.join(build, 'index.js')],
    env,
    cwd: ROOT,
    logDir,
  });
  const args = script(build, 'worker.js', 'src/worker.ts');
  const worker = new ManagedProcess({ name: 'worker', args, env, cwd: ROOT, logDir });
  onStop.add(() => app.stop());
  onStop.add(() => worker.stop());
  app.start();
  worker.start();
  return { app, worker };
}

async function bringUp(
  options: StackOptions,
  build: string,
  say: (line: string) => void,
  onStop: Closers,
): Promise<Stack> {
  const { dataDir } = options;
  if (!existsSync(path.join(build, 'index.js')))
    throw new Error(`There is no built application in ${build}.`);
  const ports = await choosePorts(options.ports ?? FREE_PORTS);
  const origin = `http://localhost:${String(ports.app)}`;
  const services = await startServices(dataDir, ports, origin, onStop);
  const secrets = await registerWebhooks({
    apiUrl: services.payments.url,
    secretKey: SECRET_KEY,
    origin,
    file: path.join(dataDir, 'webhooks.json'),
  });
  const env = environment({
    mode: options.mode,
    dataDir,
    migrationsDir: path.join(ROOT, 'drizzle'),
    build,
    origin,
    ports,
    services,
    secrets,
    extra: options.env,
  });
  const command = (name: string, args: string[] = [], onLine?: (line: string) => void) =>
    runCommand({
      args: [...script(build, `cli/${name}.js`, `src/cli/${name}.ts`), ...args],
      env,
      cwd: ROOT,
      timeoutMs: COMMAND_TIMEOUT_MS,
      onLine,
    });
  const must = async (name: string, onLine?: (line: string) => void) => {
    const { code, output } = await command(name, [], onLine);
    if (code === 0) return;
    const hint = name === 'migrate' ? '\nnpm run demo -- --fresh begins with empty data.' : '';
    throw new Error(`${name} ended with code ${String(code)}:\n${output.trimEnd()}${hint}`);
  };
  await must('migrate');
  const seeded = path.join(dataDir, 'seeded');
  if (options.seed === true && !existsSync(seeded)) {
    say('Filling the demo with data …');
    await must('seed', say);
    writeFileSync(seeded, `${new Date().toISOString()}\n`);
  }
  const { app, worker } = startProcesses(build, env, path.join(dataDir, 'logs'), onStop);
  const waitUntilReady = () => waitForHealth(origin, app);
  await waitUntilReady();
  if (!worker.running) throw new Error(`The worker ended while starting:\n${worker.lastLines()}`);
  // What the seed set off was sent while nobody listened yet.
  await fetch(`${services.payments.url}/_control/webhooks/flush`, { method: 'POST' });
  return {
    origin,
    dataDir,
    ports,
    env,
    app,
    worker,
    ...services,
    signIns: readSignIns(dataDir),
    command,
    waitUntilReady,
    stop: () => onStop.run(),
  };
}

function announce(stack: Stack, stays: boolean): void {
  const lines = [`Coilyard    ${stack.origin}`, `Mails       ${stack.mail.url}`];
  if (stack.signIns.length > 0) lines.push('', 'Sign in as:', signInTable(stack.signIns));
  if (stays) lines.push('', 'Stop with Ctrl+C. Start with --fresh to begin anew.');
  process.stdout.write(`${lines.join('\n')}\n`);
}

/** What other processes need to know of a running stack. */
function writeReadyFile(file: string, stack: Stack): void {
  const info = {
    origin: stack.origin,
    mailUrl: stack.mail.url,
    paymentsUrl: stack.payments.url,
    objectsUrl: stack.objects.url,
    dataDir: stack.dataDir,
    env: stack.env,
    pids: { stack: process.pid, app: stack.app.pid, worker: stack.worker.pid, mail: stack.mail.pid },
  };
  // Whole or not at all: others wait for the file to appear.
  writeFileSync(`${file}.new`, JSON.stringify(info, null, 2), { mode: 0o600 });
  renameSync(`${file}.new`, file);
}

async function main(): Promise<number> {
  const { values } = parseArgs({
    options: {
      mode: { type: 'string', default: 'demo' },
      data: { type: 'string', default: '.data' },
      ports: { type: 'string', default: 'fixed' },
      build: { type: 'string', default: 'build' },
      seed: { type: 'boolean', default: false },
      check: { type: 'boolean', default: false },
      'ready-file': { type: 'string' },
    },
  });
  if (values.mode !== 'demo' && values.mode !== 'test') throw new Error('--mode is demo or test');
  const ended = new Promise<string>((resolve) => {
    for (const signal of ['SIGTERM', 'SIGINT'] as const) process.once(signal, () => resolve(signal));
  });
  const stack = await startStack({
    mode: values.mode,
    dataDir: values.data,
    ports: values.ports === 'free' ? FREE_PORTS : FIXED_PORTS,
    seed: values.seed,
    build: values.build,
    say: (line) => process.stdout.write(`${line}\n`),
  });
  try {
    announce(stack, values.mode === 'demo' && !values.check);
    if (values['ready-file'] !== undefined) writeReadyFile(values['ready-file'], stack);
    if (values.check) return await check(stack);
    const failed = new Promise<string>((resolve) => {
      for (const one of [stack.app, stack.worker]) {
        one.onUnexpectedExit = (code) =>
          resolve(`The ${one.name} ended with code ${String(code)}:\n${one.lastLines()}`);
      }
    });
    const outcome = await Promise.race([ended.then(() => null), failed]);
    if (outcome === null) return 0;
    process.stderr.write(`${outcome}\n`);
    return 1;
  } finally {
    await stack.stop();
  }
}

async function check(stack: Stack): Promise<number> {
  if (stack.signIns.length === 0) throw new Error('The seed wrote no sign-ins.');
  for (const signIn of stack.signIns) {
    await trySignIn(stack.origin, signIn);
  }
  const mails = await fetch(`${stack.mail.url}/`, { headers: { accept: 'text/html' } });
  if (!mails.ok || !(await mails.text()).includes('<html')) throw new Error('The mail page does not answer.');
  process.stdout.write('Check passed: started, signed in, mail page answers.\n');
  return 0;
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(process.argv[1]).href) {
  try {
    process.exitCode = await main();
  } catch (error) {
    process.stderr.write(`${error instanceof Error ? error.message : String(error)}\n`);
    process.exitCode = 1;
  }
}
