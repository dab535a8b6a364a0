/** What geometry and solver refused, and the code each refusal is said under. */
import type { InductionInputCode } from '../../input-error.ts';
import type { CheckContext } from '../context.ts';
import type { FindingCode } from '../types.ts';

export const problemCodes: Partial<Record<InductionInputCode, FindingCode>> = {
  'turns-open': 'turns-open',
  'turns-overlap': 'turns-touch',
  'part-overlaps-coil': 'part-touches-coil',
  'outside-method': 'outside-method',
  'too-many-unknowns': 'outside-method',
  'not-converged': 'outside-method',
  'does-not-conduct': 'part-does-not-couple',
};
export const problemsOf = (context: CheckContext) => [...context.geometry.problems, ...context.refusals];
