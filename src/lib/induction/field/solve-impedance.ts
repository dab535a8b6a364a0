import type { ImpedanceAnswer, ImpedanceQuery } from '../check/types.ts';
import { cheapImpedance } from './cheap.ts';

/**
 * Impedance of a coil, with or without its part, at one frequency and one thermal state.
 *
 * @throws InductionInputError for input that cannot be computed, with a plain message and the field
 */
export function solveImpedance(query: ImpedanceQuery): ImpedanceAnswer {
  return cheapImpedance(query);
}
