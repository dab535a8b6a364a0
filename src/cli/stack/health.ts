import type { ManagedProcess } from './process.ts';

const READY_TIMEOUT_MS = 120_000;

/** Waits until the application says that it is ready; throws with the end of its log when it does not. */
export async function waitForHealth(origin: string, app: ManagedProcess): Promise<void> {
  const deadline = Date.now() + READY_TIMEOUT_MS;
  let last = 'no answer';
  while (Date.now() < deadline) {
    if (!app.running) throw new Error(`The application ended while starting:\n${app.lastLines()}`);
    try {
      const response = await fetch(`${origin}/api/health`, { signal: AbortSignal.timeout(5000) });
      await response.text();
      if (response.status === 200) return;
      last = `status ${String(response.status)}`;
    } catch {
      last = 'no answer';
    }
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
  throw new Error(
    `The application is not ready after ${String(READY_TIMEOUT_MS / 1000)} s (${last}):\n${app.lastLines()}`,
  );
}
