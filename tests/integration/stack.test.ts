import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { closers, lock } from '../../src/cli/stack/lock.ts';
import { choosePorts, FREE_PORTS, freePort } from '../../src/cli/stack/ports.ts';
import { ManagedProcess, runCommand } from '../../src/cli/stack/process.ts';
import { signInTable } from '../../src/cli/stack/sign-ins.ts';
import { registerWebhooks } from '../../src/cli/stack/webhooks.ts';
import { eventually, startContract, testKey, type Contract } from '../support/payments.ts';

const folder = mkdtempSync(path.join(tmpdir(), 'coilyard-stack-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
const env = { PATH: process.env['PATH'] ?? '' };

describe('ports', () => {
  it('are the next free ones when the wanted ones are taken, and never the same twice', async () => {
    const holder = createServer();
    await new Promise<void>((resolve) => holder.listen(0, '127.0.0.1', resolve));
    const address = holder.address();
    const taken = typeof address === 'object' && address !== null ? address.port : 0;
    const found = await freePort(taken, []);
    expect(found).toBeGreaterThan(taken);
    expect(await freePort(found, [found])).not.toBe(found);
    const five = await choosePorts({
      app: taken,
      payments: taken,
      objects: taken,
      smtp: taken,
      mailPage: taken,
    });
    expect(new Set(Object.values(five)).size).toBe(5);
    expect(new Set(Object.values(await choosePorts(FREE_PORTS))).size).toBe(5);
    await new Promise((resolve) => holder.close(resolve));
  });
});

describe('a data folder', () => {
  it('belongs to one stack at a time; a lock of a dead process does not count', () => {
    writeFileSync(path.join(folder, 'stack.pid'), String(process.ppid));
    expect(() => lock(folder)).toThrow('is in use by process');
    writeFileSync(path.join(folder, 'stack.pid'), '999999999');
    const release = lock(folder);
    expect(readFileSync(path.join(folder, 'stack.pid'), 'utf8')).toBe(String(process.pid));
    release();
    expect(() => lock(folder)()).not.toThrow();
  });
});

describe('stopping', () => {
  it('goes backwards', async () => {
    const order: string[] = [];
    const list = closers();
    list.add(() => void order.push('first'));
    list.add(() => Promise.resolve(void order.push('second')));
    await list.run();
    await list.run();
    expect(order).toEqual(['second', 'first']);
  });
});

describe('a managed process', () => {
  const make = (code: string) =>
    new ManagedProcess({
      name: `p${String(Math.random()).slice(2)}`,
      args: ['-e', code],
      env,
      cwd: folder,
      logDir: folder,
    });
  let current: ManagedProcess | undefined;
  afterEach(async () => {
    await current?.stop('SIGKILL');
  });

  it('keeps its output, stops when told, and starts again', async () => {
    current = make("console.log('up', process.pid); setInterval(() => {}, 1000)");
    let surprises = 0;
    current.onUnexpectedExit = () => (surprises += 1);
    current.start();
    const first = current.pid;
    await eventually(
      () => Promise.resolve(current?.lastLines() ?? ''),
      (text) => text.includes(`up ${String(first)}`),
    );
    await current.stop();
    expect(current.running).toBe(false);
    current.start();
    expect(current.pid).not.toBe(first);
    await current.stop('SIGKILL');
    expect(surprises).toBe(0);
  });

  it('reports an end that nobody ordered', async () => {
    current = make("console.error('broken'); process.exit(3)");
    const code = new Promise((resolve) => {
      if (current !== undefined) current.onUnexpectedExit = resolve;
    });
    current.start();
    expect(await code).toBe(3);
    await eventually(
      () => Promise.resolve(current?.lastLines() ?? ''),
      (text) => text.includes('broken'),
    );
  });

  it('is killed when it does not listen', async () => {
    current = make("process.on('SIGTERM', () => {}); console.log('deaf'); setInterval(() => {}, 1000)");
    current.start();
    await eventually(
      () => Promise.resolve(current?.lastLines() ?? ''),
      (text) => text.includes('deaf'),
    );
    await current.stop('SIGTERM', 100);
    expect(current.running).toBe(false);
  });
});

describe('a command', () => {
  it('gives code, output and lines, and is ended when it takes too long', async () => {
    const lines: string[] = [];
    const result = await runCommand({
      args: ['-e', "console.log('one'); console.log('two'); process.exit(4)"],
      env,
      cwd: folder,
      timeoutMs: 20_000,
      onLine: (line) => lines.push(line),
    });
    expect(result).toEqual({ code: 4, output: 'one\ntwo\n' });
    expect(lines).toEqual(['one', 'two']);
    const endless = await runCommand({
      args: ['-e', 'setInterval(() => {}, 1000)'],
      env,
      cwd: folder,
      timeoutMs: 300,
    });
    expect(endless.code).toBeNull();
  });
});

describe('webhooks of the stack', () => {
  let contract: Contract;
  beforeAll(async () => {
    contract = await startContract();
  });
  afterAll(() => contract.close());

  it('are registered once, keep their secrets, and follow the application to another port', async () => {
    const register = (origin: string) =>
      registerWebhooks({
        apiUrl: contract.url,
        secretKey: testKey,
        origin,
        file: path.join(folder, 'webhooks.json'),
      });
    const first = await register('http://localhost:3000');
    expect(await register('http://localhost:3001')).toEqual(first);
    const { data } = await contract.stripe.webhookEndpoints.list();
    expect(data.map((one) => one.url)).toEqual(['http://localhost:3001/api/webhooks/payments']);
    const destination = await contract.stripe.v2.core.eventDestinations.retrieve(first.destinationId, {
      include: ['webhook_endpoint.url'],
    });
    expect(destination.webhook_endpoint?.url).toBe('http://localhost:3001/api/webhooks/payment-accounts');
  });

  it('are registered anew when the service has forgotten them', async () => {
    const given = {
      apiUrl: contract.url,
      secretKey: testKey,
      origin: 'http://localhost:3000',
      file: path.join(folder, 'again.json'),
    };
    const first = await registerWebhooks(given);
    await contract.control('POST', 'reset', { seed: 'after' });
    const second = await registerWebhooks(given);
    expect(second.endpointId).not.toBe(first.endpointId);
    expect(second.endpointSecret).not.toBe(first.endpointSecret);
  });
});

describe('the list of sign-ins', () => {
  it('is a table, with notes where there are some', () => {
    expect(
      signInTable([
        { role: 'Admin', email: 'a@x.example', password: 'secret', note: 'second factor' },
        { role: 'Owner', email: 'owner@x.example', password: 'secret' },
      ]),
    ).toBe('  Admin  a@x.example      secret  second factor\n  Owner  owner@x.example  secret');
  });
});
