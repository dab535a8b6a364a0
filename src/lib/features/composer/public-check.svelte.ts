/** The server's check without an account: asked when typing pauses, so that the bench shows confirmed figures. */
import type { CheckResult, Requirement } from '$lib/induction/check/types.ts';

const pauseMs = 1_500;

export class PublicCheck {
  problem = $state<string | null>(null);
  asking = $state(false);
  #timer: ReturnType<typeof setTimeout> | undefined;
  #running: AbortController | undefined;

  constructor(private readonly answered: (result: CheckResult, text: string) => void) {}

  ask(requirement: Requirement, text: string): void {
    clearTimeout(this.#timer);
    this.#running?.abort();
    this.#timer = setTimeout(() => void this.#send(requirement, text), pauseMs);
  }

  async #send(requirement: Requirement, text: string): Promise<void> {
    const running = new AbortController();
    this.#running = running;
    this.asking = true;
    try {
      const response = await fetch('/api/v1/checks', {
        method: 'POST',
        headers: { 'content-type': 'application/json' },
        body: JSON.stringify({ requirement }),
        signal: running.signal,
      });
      const body: unknown = await response.json();
      if (response.ok) {
        this.problem = null;
        this.answered(body as CheckResult, text);
      } else {
        const detail = body && typeof body === 'object' && 'detail' in body ? String(body.detail) : '';
        this.problem = detail || 'The server did not answer as expected; the preview stands.';
      }
    } catch {
      if (!running.signal.aborted) this.problem = 'The server could not be reached; the preview stands.';
    } finally {
      if (this.#running === running) this.asking = false;
    }
  }

  close(): void {
    clearTimeout(this.#timer);
    this.#running?.abort();
  }
}
