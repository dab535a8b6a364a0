import { createServer } from 'node:net';

export interface StackPorts {
  app: number;
  payments: number;
  objects: number;
  smtp: number;
  mailPage: number;
}

/** What the demo asks for; the next free port is taken where one is in use. */
export const FIXED_PORTS: StackPorts = {
  app: 3000,
  payments: 4010,
  objects: 4020,
  smtp: 4030,
  mailPage: 4031,
};
export const FREE_PORTS: StackPorts = { app: 0, payments: 0, objects: 0, smtp: 0, mailPage: 0 };

function listens(port: number, host: string): Promise<number | null> {
  return new Promise((resolve, reject) => {
    const probe = createServer();
    probe.once('error', (error: NodeJS.ErrnoException) => {
      if (error.code === 'EADDRINUSE' || error.code === 'EACCES') resolve(null);
      else reject(error);
    });
    probe.listen({ port, host, exclusive: true }, () => {
      const address = probe.address();
      const found = typeof address === 'object' && address !== null ? address.port : 0;
      probe.close(() => resolve(found));
    });
  });
}

/** The port, or the next free one above it; 0 takes any. Never one of `taken`. */
export async function freePort(preferred: number, taken: number[], host = '127.0.0.1'): Promise<number> {
  for (let port = preferred; port <= preferred + 100; port += 1) {
    if (preferred !== 0 && taken.includes(port)) continue;
    const found = await listens(preferred === 0 ? 0 : port, host);
    if (found !== null && !taken.includes(found)) return found;
  }
  throw new Error(`No free port from ${String(preferred)} to ${String(preferred + 100)}.`);
}

/** One port for each part of the stack. */
export async function choosePorts(wanted: StackPorts): Promise<StackPorts> {
  const taken: number[] = [];
  const next = async (port: number) => {
    const found = await freePort(port, taken);
    taken.push(found);
    return found;
  };
  // One after the other: what is chosen is not asked for again.
  const app = await next(wanted.app);
  const payments = await next(wanted.payments);
  const objects = await next(wanted.objects);
  const smtp = await next(wanted.smtp);
  return { app, payments, objects, smtp, mailPage: await next(wanted.mailPage) };
}
