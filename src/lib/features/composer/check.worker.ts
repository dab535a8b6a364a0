/** The live check, off the page's thread. Its figures are a preview: never stored, hashed or compared. */
import { checkRequirement } from '$lib/induction/check/check-requirement.ts';
import type { CheckResult, Requirement } from '$lib/induction/check/types.ts';

export interface LiveQuestion {
  id: number;
  requirement: Requirement;
}
export type LiveAnswer = { id: number; result: CheckResult } | { id: number; problem: string };

self.onmessage = (event: MessageEvent<LiveQuestion>) => {
  const { id, requirement } = event.data;
  let answer: LiveAnswer;
  try {
    answer = { id, result: checkRequirement(requirement, { setting: 'preview' }) };
  } catch (error) {
    answer = { id, problem: error instanceof Error ? error.message : String(error) };
  }
  self.postMessage(answer);
};
