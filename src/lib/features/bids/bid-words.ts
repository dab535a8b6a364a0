import type { BidState } from '../../domain/bid.ts';
import type { StateKind } from '../../ui/state-kind.ts';

/** How a bid's state looks: the shape that goes with its word. */
export const bidStateKind: Record<BidState, StateKind> = {
  draft: 'neutral',
  submitted: 'ok',
  'to-confirm': 'caution',
  awarded: 'ok',
  'not-selected': 'neutral',
  withdrawn: 'neutral',
  lapsed: 'neutral',
};

/** What an exception can be about, offered in the form; own words are possible too. */
export const exceptionSubjects = [
  'Inside diameter',
  'Turns or pitch',
  'Tube section or wall',
  'Copper grade',
  'Leads and connection',
  'Supports and insulation',
  'Inductance acceptance band',
  'Pressure or flow test',
  'Electrical tests',
  'Documents and certificates',
  'Fixture',
  'Delivery term or date',
  'Free-issue or sample parts',
  'Warranty or other terms',
] as const;
