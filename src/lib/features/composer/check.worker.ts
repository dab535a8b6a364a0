/** The live check, off the page's thread. Its figures are a preview: never stored, hashed or compared. */
import { checkRequirement } from '$lib/induction/check/check-requirement.ts';
import type { CheckResult, Requirement } from '$lib/induction/check/types.ts';

export interface LiveQuestion {
  id: number;
  requirement: Requirement;
}
/** Nominal figures come first, the bands a moment later. */
export type LiveAnswer = { id: number; result: CheckResult; last: boolean } | { id: number; problem: string };

function answer(message: LiveAnswer): void {
  self.postMessage(message);
}

self.onmessage = (event: MessageEvent<LiveQuestion>) => {
  const { id, requirement } = event.data;
  try {
    answer({ id, result: checkRequirement(requirement, { setting: 'preview', bands: false }), last: false });
    answer({ id, result: checkRequirement(requirement, { setting: 'preview' }), last: true });
  } catch (error) {
    answer({ id, problem: error instanceof Error ? error.message : String(error) });
  }
};
