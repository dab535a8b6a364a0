/** Keeps a draft on the server: saves as typed, has it checked when typing pauses, and never loses a word. */
import { z } from 'zod';
import type { FindingAnswer } from '$lib/domain/finding-answers.ts';
import type { CheckResult } from '$lib/induction/check/types.ts';
import type { UnitSet } from '$lib/induction/units/dimensions.ts';

export interface DraftSnapshot {
  form: { unitSet: UnitSet; values: Record<string, string> };
  machineId: string | null;
  machineVersion: number | null;
}

export type SaveState = 'saved' | 'waiting' | 'saving' | 'retrying' | 'conflict' | 'refused';

export interface StoredCheck {
  checkId: string;
  requestVersion: number;
  methodVersion: string;
  answers: FindingAnswer[];
  result: CheckResult;
}

const saveAfterMs = 600;
const checkAfterMs = 900;

const savedSchema = z.object({
  version: z.number(),
  savedAt: z.number(),
  requirementComplete: z.boolean(),
  commercialComplete: z.boolean(),
});
const problemSchema = z.object({
  code: z.string(),
  detail: z.string(),
  fields: z.record(z.string(), z.string()).default({}),
  data: z.unknown().optional(),
});
const conflictSchema = z.object({
  version: z.number(),
  form: z
    .object({ unitSet: z.enum(['metric', 'inch']), values: z.record(z.string(), z.string()) })
    .optional(),
  machineId: z.string().nullable().optional(),
  machineVersion: z.number().nullable().optional(),
});

export type NewerDraft = z.output<typeof conflictSchema>;

interface Options {
  requestId: string;
  version: number;
  savedAt: number;
  requirementComplete: boolean;
  snapshot: () => DraftSnapshot;
  /** A stored check of the version on the screen has arrived. */
  onChecked?: () => void;
}

async function problemOf(response: Response): Promise<z.output<typeof problemSchema>> {
  const parsed = problemSchema.safeParse(await response.json().catch(() => null));
  return parsed.success
    ? parsed.data
    : { code: 'unexpected', detail: 'The server did not answer as expected.', fields: {} };
}

export class DraftSync {
  version = $state(0);
  savedAt = $state(0);
  save = $state<SaveState>('saved');
  problem = $state<string | null>(null);
  /** The other side's state after a conflict. */
  newer = $state.raw<NewerDraft | null>(null);
  check = $state.raw<StoredCheck | null>(null);
  checking = $state(false);
  checkProblem = $state<string | null>(null);

  readonly #options: Options;
  #saveTimer: ReturnType<typeof setTimeout> | undefined;
  #checkTimer: ReturnType<typeof setTimeout> | undefined;
  #dirty = false;
  #requirementComplete: boolean;
  #working: Promise<void> | undefined;
  #failures = 0;

  constructor(options: Options) {
    this.#options = options;
    this.version = options.version;
    this.savedAt = options.savedAt;
    this.#requirementComplete = options.requirementComplete;
  }

  /** True while the stored check is of the draft's present, saved version. */
  get confirmed(): boolean {
    return this.save === 'saved' && this.check?.requestVersion === this.version;
  }

  get #backupKey(): string {
    return `coilyard-draft-${this.#options.requestId}`;
  }

  /** Something was typed. */
  changed(): void {
    this.#dirty = true;
    if (this.save === 'conflict') return;
    if (this.save !== 'saving') this.save = 'waiting';
    clearTimeout(this.#checkTimer);
    clearTimeout(this.#saveTimer);
    this.#backUp();
    this.#saveTimer = setTimeout(() => void this.flush(), saveAfterMs);
  }

  /** Saves now what is not saved yet; resolves when there is nothing left to save or it cannot be saved. */
  async flush(): Promise<void> {
    clearTimeout(this.#saveTimer);
    while (this.#working) await this.#working;
    if (!this.#dirty || this.save === 'conflict') return;
    this.#working = this.#saveOnce();
    await this.#working;
    this.#working = undefined;
    if (this.#dirty && this.save === 'saving') {
      this.save = 'waiting';
      this.#saveTimer = setTimeout(() => void this.flush(), saveAfterMs);
    }
  }

  async #saveOnce(): Promise<void> {
    this.#dirty = false;
    this.save = 'saving';
    const body = JSON.stringify({ version: this.version, ...this.#options.snapshot() });
    let response: Response;
    try {
      response = await fetch(`/api/v1/requests/${this.#options.requestId}/draft`, {
        method: 'PUT',
        headers: { 'content-type': 'application/json' },
        body,
        keepalive: body.length < 60_000,
      });
    } catch {
      this.#retryLater(
        'No connection. What you type is kept in this browser and saved as soon as it is back.',
      );
      return;
    }
    if (response.ok) {
      const saved = savedSchema.parse(await response.json());
      this.version = saved.version;
      this.savedAt = saved.savedAt;
      this.problem = null;
      this.#failures = 0;
      this.#requirementComplete = saved.requirementComplete;
      if (!this.#dirty) {
        this.save = 'saved';
        this.#forgetBackup();
        this.scheduleCheck();
      }
      return;
    }
    const problem = await problemOf(response);
    if (problem.code === 'version-conflict') {
      this.#dirty = true;
      this.newer = conflictSchema.parse(problem.data);
      this.save = 'conflict';
    } else if (response.status >= 500 || response.status === 429) this.#retryLater(problem.detail);
    else {
      this.#dirty = true;
      this.save = 'refused';
      this.problem = problem.detail;
    }
  }

  #retryLater(message: string): void {
    this.#dirty = true;
    this.#failures += 1;
    this.save = 'retrying';
    this.problem = message;
    clearTimeout(this.#saveTimer);
    this.#saveTimer = setTimeout(() => void this.flush(), Math.min(30_000, 1_000 * 2 ** this.#failures));
  }

  /** After a conflict: take the newer version as the base and write the own state over it. */
  async keepMine(): Promise<void> {
    if (!this.newer) return;
    this.version = this.newer.version;
    this.newer = null;
    this.save = 'waiting';
    this.#dirty = true;
    await this.flush();
  }

  /** After a conflict: the newer state was put into the form. */
  tookTheirs(): void {
    if (!this.newer) return;
    this.version = this.newer.version;
    this.newer = null;
    this.#dirty = false;
    this.save = 'saved';
    this.#forgetBackup();
    this.scheduleCheck();
  }

  scheduleCheck(afterMs = checkAfterMs): void {
    clearTimeout(this.#checkTimer);
    if (!this.#requirementComplete) return;
    this.#checkTimer = setTimeout(() => void this.checkNow(), afterMs);
  }

  /** The server's check of the saved version. */
  async checkNow(): Promise<void> {
    clearTimeout(this.#checkTimer);
    if (this.confirmed || this.checking || this.save !== 'saved' || !this.#requirementComplete) return;
    const version = this.version;
    this.checking = true;
    try {
      const response = await fetch(`/api/v1/requests/${this.#options.requestId}/checks`, {
        method: 'POST',
        headers: { 'content-type': 'application/json' },
        body: JSON.stringify({ version }),
      });
      if (response.ok) {
        // Our own server wrote it; its shape is the check's own type.
        const { check, result } = (await response.json()) as {
          check: Omit<StoredCheck, 'result'>;
          result: CheckResult;
        };
        this.check = { ...check, result };
        this.checkProblem = null;
        if (this.confirmed) this.#options.onChecked?.();
      } else {
        const problem = await problemOf(response);
        if (problem.code !== 'version-conflict') this.checkProblem = problem.detail;
      }
    } catch {
      this.checkProblem = 'The server could not be reached for its check. It is asked again.';
    } finally {
      this.checking = false;
    }
    if (this.save === 'saved' && !this.confirmed)
      this.scheduleCheck(this.checkProblem ? 8_000 : checkAfterMs);
  }

  /** Acknowledges a caution or carries a blocker on the stored check; answers a message when it was refused. */
  async answer(
    finding: { code: string; subject: string },
    answer: { kind: 'acknowledged' } | { kind: 'carried'; reason: string },
  ): Promise<string | null> {
    if (!this.check) return 'The server has not checked this version yet.';
    const response = await fetch(`/api/v1/requests/${this.#options.requestId}/answers`, {
      method: 'POST',
      headers: { 'content-type': 'application/json' },
      body: JSON.stringify({
        checkId: this.check.checkId,
        code: finding.code,
        subject: finding.subject,
        ...answer,
      }),
    }).catch(() => null);
    if (!response) return 'The server could not be reached. Please try again.';
    if (!response.ok) {
      const problem = await problemOf(response);
      return Object.values(problem.fields)[0] ?? problem.detail;
    }
    const { answers } = (await response.json()) as { answers: FindingAnswer[] };
    this.check = { ...this.check, answers };
    return null;
  }

  #backUp(): void {
    try {
      localStorage.setItem(
        this.#backupKey,
        JSON.stringify({ version: this.version, snapshot: this.#options.snapshot() }),
      );
    } catch {
      // Storage may be full or forbidden; the server's copy is the one that counts.
    }
  }

  #forgetBackup(): void {
    try {
      localStorage.removeItem(this.#backupKey);
    } catch {
      // As above.
    }
  }

  /** What was typed in this browser and never reached the server, if it belongs to this version. */
  backup(): DraftSnapshot | null {
    try {
      const text = localStorage.getItem(this.#backupKey);
      if (!text) return null;
      const kept = JSON.parse(text) as { version: number; snapshot: DraftSnapshot };
      if (kept.version === this.version) return kept.snapshot;
      this.#forgetBackup();
    } catch {
      // Unreadable: nothing to bring back.
    }
    return null;
  }

  get hasUnsaved(): boolean {
    return this.#dirty;
  }

  close(): void {
    clearTimeout(this.#checkTimer);
    if (this.#dirty && this.save !== 'conflict') void this.flush();
    clearTimeout(this.#saveTimer);
  }
}
