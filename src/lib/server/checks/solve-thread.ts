import { checkRequirement } from '../../induction/check/check-requirement.ts';
import type { Requirement, SolverSetting } from '../../induction/check/types.ts';
import { InductionInputError } from '../../induction/input-error.ts';

export interface SolveTask {
  kind: 'check';
  requirement: Requirement;
  setting: SolverSetting;
}

/** Results cross back as text, as they are stored and sent; a refusal keeps its field and words. */
export type SolveOutcome = { ok: true; body: string } | { ok: false; field: string; message: string };

/** Runs in a worker thread. */
export default function solve(task: SolveTask): SolveOutcome {
  try {
    const result = checkRequirement(task.requirement, { setting: task.setting });
    return { ok: true, body: JSON.stringify(result) };
  } catch (error) {
    if (error instanceof InductionInputError) {
      return { ok: false, field: error.field, message: error.message };
    }
    throw error;
  }
}
