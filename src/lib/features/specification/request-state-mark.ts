import { requestStateText, type RequestState } from '$lib/domain/request-states.ts';
import type { StateKind } from '$lib/ui/state-kind.ts';

const kinds: Record<RequestState, StateKind> = {
  draft: 'waiting',
  posted: 'ok',
  closed: 'waiting',
  awarded: 'ok',
  done: 'ok',
  ended: 'neutral',
  're-opened': 'caution',
  withdrawn: 'neutral',
  lapsed: 'neutral',
};

export function requestStateMark(state: RequestState): { kind: StateKind; word: string } {
  return { kind: kinds[state], word: requestStateText[state] };
}
