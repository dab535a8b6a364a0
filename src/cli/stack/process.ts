import { spawn, type ChildProcess } from 'node:child_process';
import { createWriteStream, mkdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { createInterface } from 'node:readline';

export interface ProcessOptions {
  name: string;
  args: string[];
  env: Record<string, string>;
  cwd: string;
  logDir: string;
}

/** A child that can be killed and started again; its output goes to a log file. */
export class ManagedProcess {
  readonly name: string;
  readonly logFile: string;
  /** Called when the child ends without having been told to. */
  onUnexpectedExit: (code: number | null) => void = () => {};
  private readonly options: ProcessOptions;
  private child: ChildProcess | undefined;
  private told = false;

  constructor(options: ProcessOptions) {
    this.options = options;
    this.name = options.name;
    mkdirSync(options.logDir, { recursive: true });
    this.logFile = path.join(options.logDir, `${options.name}.log`);
  }

  get pid(): number | undefined {
    return this.child?.pid;
  }

  get running(): boolean {
    return this.child !== undefined && this.child.exitCode === null && this.child.signalCode === null;
  }

  start(): void {
    if (this.running) return;
    this.told = false;
    const log = createWriteStream(this.logFile, { flags: 'a' });
    const child = spawn(process.execPath, this.options.args, {
      cwd: this.options.cwd,
      env: this.options.env,
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    this.child = child;
    child.stdout.pipe(log, { end: false });
    child.stderr.pipe(log, { end: false });
    child.once('close', (code) => {
      log.end();
      if (!this.told && this.child === child) this.onUnexpectedExit(code);
    });
  }

  /** Ends the child and waits until it is gone; a child that does not stop in time is killed. */
  async stop(signal: NodeJS.Signals = 'SIGTERM', patienceMs = 10_000): Promise<void> {
    const { child } = this;
    this.told = true;
    if (child === undefined || !this.running) return;
    await new Promise<void>((resolve) => {
      const force = setTimeout(() => child.kill('SIGKILL'), patienceMs);
      child.once('exit', () => {
        clearTimeout(force);
        resolve();
      });
      child.kill(signal);
    });
  }

  /** The end of the log, for messages about what went wrong. */
  lastLines(count = 30): string {
    try {
      return readFileSync(this.logFile, 'utf8').trimEnd().split('\n').slice(-count).join('\n');
    } catch {
      return '';
    }
  }
}

export interface CommandResult {
  code: number | null;
  output: string;
}

/** Runs a command to its end and gives what it printed. */
export function runCommand(options: {
  args: string[];
  env: Record<string, string>;
  cwd: string;
  timeoutMs: number;
  /** Told each line as it is printed. */
  onLine?: ((line: string) => void) | undefined;
}): Promise<CommandResult> {
  return new Promise((resolve, reject) => {
    const child = spawn(process.execPath, options.args, {
      cwd: options.cwd,
      env: options.env,
      stdio: ['ignore', 'pipe', 'pipe'],
    });
    let output = '';
    const keep = (chunk: Buffer) => {
      output = (output + chunk.toString()).slice(-200_000);
    };
    child.stdout.on('data', keep);
    child.stderr.on('data', keep);
    const { onLine } = options;
    if (onLine !== undefined) createInterface({ input: child.stdout }).on('line', onLine);
    const timer = setTimeout(() => child.kill('SIGKILL'), options.timeoutMs);
    child.once('error', reject);
    child.once('close', (code) => {
      clearTimeout(timer);
      resolve({ code, output });
    });
  });
}
