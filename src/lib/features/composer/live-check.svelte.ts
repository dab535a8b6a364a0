/** Asks the check in a worker while someone types: the newest question wins, the last answer stays. */
import type { CheckResult, Requirement } from '$lib/induction/check/types.ts';
import type { LiveAnswer, LiveQuestion } from './check.worker.ts';

/** A run that takes longer than this is given up when there is a newer question. */
const patienceMs = 1_500;
const debounceMs = 250;

export class LiveCheck {
  result = $state.raw<CheckResult | null>(null);
  /** Text of the requirement that `result` was computed from. */
  resultText = $state.raw('');
  busy = $state(false);
  problem = $state<string | null>(null);

  #worker: Worker | undefined;
  #timer: ReturnType<typeof setTimeout> | undefined;
  #running: { id: number; text: string; since: number } | undefined;
  #waiting: { requirement: Requirement; text: string } | undefined;
  #lastId = 0;
  #closed = false;

  /** Asks for a check of this requirement, soon; `text` names it. */
  ask(requirement: Requirement, text: string): void {
    clearTimeout(this.#timer);
    this.busy = true;
    this.#timer = setTimeout(() => {
      this.#waiting = { requirement, text };
      void this.#next();
    }, debounceMs);
  }

  async #start(): Promise<Worker> {
    if (this.#worker) return this.#worker;
    const { default: CheckWorker } = await import('./check.worker.ts?worker');
    const worker = new CheckWorker();
    worker.onmessage = (event: MessageEvent<LiveAnswer>) => this.#answered(event.data);
    worker.onerror = () => {
      this.problem = 'The live check stopped. The server’s check still works.';
      this.#drop();
      this.busy = false;
    };
    this.#worker = worker;
    return worker;
  }

  #drop(): void {
    this.#worker?.terminate();
    this.#worker = undefined;
    this.#running = undefined;
  }

  async #next(): Promise<void> {
    if (this.#closed || !this.#waiting) return;
    if (this.#running) {
      const age = performance.now() - this.#running.since;
      if (age < patienceMs) {
        clearTimeout(this.#timer);
        this.#timer = setTimeout(() => void this.#next(), patienceMs - age);
        return;
      }
      this.#drop();
    }
    const { requirement, text } = this.#waiting;
    this.#waiting = undefined;
    this.#lastId += 1;
    this.#running = { id: this.#lastId, text, since: performance.now() };
    const question: LiveQuestion = { id: this.#lastId, requirement };
    (await this.#start()).postMessage(question);
  }

  #answered(answer: LiveAnswer): void {
    if (answer.id !== this.#running?.id) return;
    const { text } = this.#running;
    if (!('result' in answer) || answer.last) this.#running = undefined;
    if ('result' in answer) {
      this.result = answer.result;
      this.resultText = text;
      this.problem = null;
    } else this.problem = answer.problem;
    // Nominal figures are enough to go on to a newer question.
    if (this.#waiting && this.#running) this.#drop();
    if (this.#waiting) void this.#next();
    else if (!this.#running) this.busy = false;
  }

  close(): void {
    this.#closed = true;
    clearTimeout(this.#timer);
    this.#drop();
  }
}
