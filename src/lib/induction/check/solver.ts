/** The field solution as the check asks it: one place that counts, reports progress and can be stopped. */
import { PermeabilityMemory } from '../field/permeability-memory.ts';
import { solveImpedance } from '../field/solve-impedance.ts';
import { InductionInputError } from '../input-error.ts';
import type { Coil, ImpedanceAnswer, Requirement, SolverSetting, Workpiece } from './types.ts';

/** Thrown when the caller's `shouldStop` says so. */
export class CheckStoppedError extends Error {
  constructor() {
    super('The check was stopped.');
    this.name = 'CheckStoppedError';
  }
}

export interface CheckOptions {
  setting: SolverSetting;
  /** Share of the work done, 0 to 1. */
  onProgress?: (share: number) => void;
  /** Asked between field solutions; true ends the check with CheckStoppedError. */
  shouldStop?: () => boolean;
  /** False leaves the bands out (model error only): nominal figures first. Default true. */
  bands?: boolean;
  /**
   * Correction from a measured coil: inductance added in the leads, H, and a factor on the whole coil. Used towards the
   * operating point of a finished coil only.
   */
  measured?: { addedInductance: number; factor: number };
}

export interface Question {
  coil: Coil;
  part: Workpiece | null;
  frequency: number;
  state: 'cold' | 'hot';
  current: number;
  includeLeads: boolean;
  setting: SolverSetting;
}

/** A change of permeability settles to some per cent of itself in two steps after the first solution. */
const ROUNDS_NEARBY = 3;

export class Solver {
  readonly refusals: InductionInputError[] = [];
  private readonly memory = PermeabilityMemory.empty();
  private readonly nearby = this.memory.forDifferences(ROUNDS_NEARBY);
  private count = 0;
  private readonly expected: number;

  constructor(
    private readonly requirement: Requirement,
    private readonly options: CheckOptions,
  ) {
    this.expected = options.bands === false ? 25 : 80;
  }

  /** null when the method refuses the question; the reason is kept in `refusals`. */
  ask(question: Question): ImpedanceAnswer | null {
    return this.solve(question, this.memory);
  }

  /** As `ask`, for questions a little beside one another whose differences are wanted. */
  askNearby(question: Question): ImpedanceAnswer | null {
    return this.solve(question, this.nearby);
  }

  private solve(question: Question, memory: PermeabilityMemory): ImpedanceAnswer | null {
    if (this.options.shouldStop?.()) throw new CheckStoppedError();
    this.count += 1;
    this.options.onProgress?.(Math.min(0.95, this.count / this.expected));
    const { process } = this.requirement;
    try {
      const answer = solveImpedance(
        {
          ...question,
          startTemperatureC: process.startTemperatureC,
          targetTemperatureC: process.targetTemperatureC,
        },
        memory,
      );
      return usable(answer) ? this.corrected(answer, question) : null;
    } catch (error) {
      if (!(error instanceof InductionInputError)) throw error;
      if (!this.refusals.some((one) => one.code === error.code && one.field === error.field))
        this.refusals.push(error);
      return null;
    }
  }

  private corrected(answer: ImpedanceAnswer, question: Question): ImpedanceAnswer {
    const { measured } = this.options;
    if (!measured) return answer;
    const inductance =
      answer.inductance * measured.factor + (question.includeLeads ? measured.addedInductance : 0);
    return {
      ...answer,
      inductance,
      assumptions: [...answer.assumptions, 'Corrected to the measured inductance.'],
    };
  }
}

/** A silent wrong number is worse than none. */
function usable(answer: ImpedanceAnswer): boolean {
  return (
    Number.isFinite(answer.inductance) &&
    answer.inductance > 0 &&
    Number.isFinite(answer.resistance) &&
    answer.resistance > 0 &&
    Number.isFinite(answer.loadResistance)
  );
}
