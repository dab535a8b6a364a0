/** Everything one check has found so far: what the rules of the findings read. */
import type { InductionInputError } from '../input-error.ts';
import type { CopperPath } from '../shop/path.ts';
import type { Assumption } from './assume.ts';
import type { Models } from './build-models.ts';
import type { Geometry } from './resolve.ts';
import type { SolvedRow } from './ladder.ts';
import type { CheckResult, Finding, ImpedanceAnswer, Requirement } from './types.ts';
import type { WaterSupplyKnown } from './water-figures.ts';

export type CheckFigures = Omit<CheckResult, 'methodVersion' | 'setting' | 'findings' | 'proposedAcceptance'>;

export interface CheckContext extends CheckFigures {
  requirement: Requirement;
  geometry: Geometry;
  /** What the solver refused. */
  refusals: InductionInputError[];
  models: Models | null;
  fittedRow: SolvedRow | null;
  /** Bare answer at the operating frequency, for per-turn values. */
  bareAnswer: ImpedanceAnswer | null;
  path: CopperPath | null;
  knownWater: WaterSupplyKnown;
  assumptions: Assumption[];
  /** Largest coil current of the rows people may use, A rms. */
  largestCurrent: number | null;
}

/** One rule: what it finds in a context, nothing when all is well. */
export type Rule = (context: CheckContext) => Finding[];
