import { checkRequirement } from '../../induction/check/check-requirement.ts';
import { heatingInputOf, type HeatingWish } from '../../induction/check/heating-run.ts';
import { impedanceSweep, type ImpedanceSweep } from '../../induction/check/impedance-sweep.ts';
import type { Requirement, SolverSetting } from '../../induction/check/types.ts';
import { runHeating } from '../../induction/heating/run-heating.ts';
import { InductionInputError } from '../../induction/input-error.ts';

/** Shared with the thread while a long task runs. */
export interface TaskWatch {
  /** One number: share of the work done, 0 to 1. */
  progress: SharedArrayBuffer;
  /** One integer: 1 asks the thread to stop. */
  stop: SharedArrayBuffer;
}

export type SolveTask =
  | { kind: 'check'; requirement: Requirement; setting: SolverSetting }
  | { kind: 'sweep'; sweep: ImpedanceSweep }
  | { kind: 'heating'; requirement: Requirement; wish: HeatingWish; watch: TaskWatch };

/** Results cross back as text, as they are stored and sent; a refusal keeps its field and words. */
export type SolveOutcome = { ok: true; body: string } | { ok: false; field: string; message: string };

function heat(task: Extract<SolveTask, { kind: 'heating' }>): SolveOutcome {
  const share = new Float64Array(task.watch.progress);
  const stop = new Int32Array(task.watch.stop);
  const shouldStop = () => Atomics.load(stop, 0) === 1;
  const check = checkRequirement(task.requirement, { setting: task.wish.setting, bands: false, shouldStop });
  const answer = heatingInputOf(task.requirement, check, task.wish);
  if (!answer.ok) return answer;
  const result = runHeating(answer.input, {
    shouldStop,
    onProgress: (done) => {
      share[0] = done;
    },
  });
  return { ok: true, body: JSON.stringify(result) };
}

/** Runs in a worker thread. */
export default function solve(task: SolveTask): SolveOutcome {
  try {
    switch (task.kind) {
      case 'check':
        return {
          ok: true,
          body: JSON.stringify(checkRequirement(task.requirement, { setting: task.setting })),
        };
      case 'sweep': {
        const answer = impedanceSweep(task.sweep);
        return answer.ok ? { ok: true, body: JSON.stringify(answer.result) } : answer;
      }
      case 'heating':
        return heat(task);
    }
  } catch (error) {
    if (error instanceof InductionInputError) {
      return { ok: false, field: error.field, message: error.message };
    }
    throw error;
  }
}
