/**
 * The stand-in of the mail server: maildev as a child process of its own, since only its command line serves
 * the page on which people read the mails.
 */
import { spawn, type ChildProcess } from 'node:child_process';
import { mkdirSync } from 'node:fs';
import { createServer, type AddressInfo } from 'node:net';
import path from 'node:path';
import { fileURLToPath } from 'node:url';

export interface MailServerOptions {
  smtpPort: number;
  webPort: number;
  host?: string;
  /** Mails survive a restart here; without it they are kept in memory. */
  dataDir?: string;
}

export interface RunningMailServer {
  smtpPort: number;
  webPort: number;
  /** Page for people, REST under `/api/email`. */
  url: string;
  pid: number;
  close: () => Promise<void>;
}

const COMMAND = path.join(
  path.dirname(fileURLToPath(import.meta.url)),
  '../../node_modules/maildev/dist/bin/maildev.js',
);
const START_TIMEOUT_MS = 20_000;

async function freePort(): Promise<number> {
  const probe = createServer();
  await new Promise<void>((resolve, reject) => {
    probe.once('error', reject);
    probe.listen(0, '127.0.0.1', resolve);
  });
  const { port } = probe.address() as AddressInfo;
  await new Promise((resolve) => probe.close(resolve));
  return port;
}

async function waitUntilReady(url: string, child: ChildProcess, errors: () => string): Promise<void> {
  const deadline = Date.now() + START_TIMEOUT_MS;
  for (;;) {
    if (child.exitCode !== null)
      throw new Error(`maildev ended with code ${String(child.exitCode)}: ${errors()}`);
    try {
      const response = await fetch(`${url}/api/email`, { signal: AbortSignal.timeout(2000) });
      await response.arrayBuffer();
      if (response.ok) return;
    } catch {
      // Not listening yet.
    }
    if (Date.now() > deadline) throw new Error(`maildev did not answer at ${url}: ${errors()}`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}

function stop(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    const force = setTimeout(() => child.kill('SIGKILL'), 3000);
    child.once('exit', () => {
      clearTimeout(force);
      resolve();
    });
    child.kill('SIGTERM');
  });
}

/** Starts maildev; port 0 takes a free one. */
export async function startMailServer(options: MailServerOptions): Promise<RunningMailServer> {
  const host = options.host ?? '127.0.0.1';
  const smtpPort = options.smtpPort === 0 ? await freePort() : options.smtpPort;
  const webPort = options.webPort === 0 ? await freePort() : options.webPort;
  const args = [
    '--smtp',
    String(smtpPort),
    '--ip',
    host,
    '--web',
    String(webPort),
    '--web-ip',
    host,
    '--silent',
  ];
  if (options.dataDir !== undefined) {
    mkdirSync(options.dataDir, { recursive: true });
    args.push('--mail-directory', options.dataDir);
  }
  // MAILDEV_* of the surroundings must not change what was asked for.
  const env = Object.fromEntries(
    Object.entries(process.env).filter(([name]) => !name.startsWith('MAILDEV_')),
  );
  const child = spawn(process.execPath, [COMMAND, ...args], { env, stdio: ['ignore', 'ignore', 'pipe'] });
  let errors = '';
  child.stderr.on('data', (chunk: Buffer) => {
    errors = (errors + chunk.toString()).slice(-2000);
  });
  const url = `http://${host}:${String(webPort)}`;
  try {
    await waitUntilReady(url, child, () => errors);
  } catch (error) {
    await stop(child);
    throw error;
  }
  return { smtpPort, webPort, url, pid: child.pid ?? 0, close: () => stop(child) };
}
